"""Tables of plain text with aligned columns."""

from __future__ import annotations

from collections.abc import Sequence


def aligned(rows: Sequence[Sequence[str]], header: Sequence[str] = ()) -> str:
    """The rows as lines of left-aligned columns, under the header if there is one."""
    lines = [list(header), *map(list, rows)] if header else list(map(list, rows))
    widths = [max(map(len, column)) for column in zip(*lines, strict=True)]
    return "\n".join("  ".join(map(str.ljust, line, widths)).rstrip() for line in lines)
