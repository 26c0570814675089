"""Print the measurements: python -m benchmarks [accuracy work growth cold bars]."""

from __future__ import annotations

import importlib
import sys

TABLES = {
    "accuracy": ("benchmarks.accuracy", "from a case to readings at 1 % and 0.1 %, spur bar"),
    "work": ("benchmarks.same_work", "the same work on the same mesh"),
    "growth": ("benchmarks.growth", "growth with size"),
    "cold": ("benchmarks.cold", "cold start"),
    "bars": ("benchmarks.bars", "error bars over all shipped cases and three fluids each"),
}


def main(wanted: list[str]) -> int:
    """Run the wanted tables (all without arguments); exit status 2 for a name there is not."""
    for name in wanted:
        if name not in TABLES:
            print(
                f"there is no table {name!r}; the tables are {', '.join(TABLES)}", file=sys.stderr
            )
            return 2
    for name in wanted or list(TABLES):
        module, title = TABLES[name]
        print(f"\n{title}", flush=True)
        for line in importlib.import_module(module).table():
            print(f"  {line}", flush=True)
    return 0


if __name__ == "__main__":
    raise SystemExit(main(sys.argv[1:]))
