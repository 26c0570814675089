"""The house rules that a machine can check: layout, first commands, imports, docstrings."""

from __future__ import annotations

import ast
import fnmatch
import os
import re
import shlex
import shutil
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
TOP_LEVEL = {
    "README.md",
    "DEVELOPERS.md",
    "LICENSE",
    "pyproject.toml",
    "benchmarks",
    "fluidev",
    "geometries",
    "tests",
}
HEAVY = {"gmsh", "matplotlib", "meshio", "pygmsh", "scipy", "skfem"}
MODULES = sorted((ROOT / "fluidev").rglob("*.py"))


def repository_files() -> list[Path]:
    """Paths, relative to the clone, of what is or would be committed (with or without git)."""
    if shutil.which("git") and (ROOT / ".git").exists():
        listed = subprocess.run(
            ["git", "ls-files", "-z", "--cached", "--others", "--exclude-standard"],
            cwd=ROOT,
            capture_output=True,
            text=True,
            check=True,
        ).stdout.split("\0")
        return [Path(name) for name in listed if name and (ROOT / name).is_file()]
    ignored = [line.strip("/") for line in (ROOT / ".gitignore").read_text("utf-8").split() if line]

    def kept(name: str) -> bool:
        return name != ".git" and not any(fnmatch.fnmatch(name, glob) for glob in ignored)

    found = []
    for folder, folders, files in os.walk(ROOT):
        folders[:] = filter(kept, folders)
        found += [Path(folder, name).relative_to(ROOT) for name in files if kept(name)]
    return found


def fenced_blocks(text: str) -> list[tuple[str, str]]:
    """(language, content) of every fenced block of a Markdown text, in order."""
    return re.findall(r"^```(\w*)\n(.*?)^```$", text, flags=re.MULTILINE | re.DOTALL)


def run_fluidev(*arguments: str, cwd: Path = ROOT) -> tuple[int, str, set[str]]:
    """Exit status, stderr without the import log, and the top-level modules imported."""
    done = subprocess.run(
        [sys.executable, "-X", "importtime", "-m", "fluidev", *arguments],
        cwd=cwd,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        capture_output=True,
        text=True,
        check=False,
    )
    log = [line for line in done.stderr.splitlines() if line.startswith("import time:")]
    said = [line for line in done.stderr.splitlines() if not line.startswith("import time:")]
    imported = {line.rpartition("|")[2].strip().partition(".")[0] for line in log}
    assert "fluidev" in imported, done.stderr
    return done.returncode, "\n".join(said), imported


def test_readme_opens_with_two_commands_of_one_line() -> None:
    blocks = fenced_blocks((ROOT / "README.md").read_text("utf-8"))
    for number, script in ((1, ".ci/setup"), (2, ".ci/test")):
        language, command = blocks[number - 1]
        assert language == "sh"
        assert command.count("\n") == 1
        assert command.startswith(f"sh {script}")
        assert (ROOT / script).is_file()
        # What .ci/run will execute is this very block.
        printed = subprocess.run(
            ["sh", ".ci/readme-command", str(number)],
            cwd=ROOT,
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        assert printed == command
        assert f"readme_command {number}\n" in (ROOT / ".ci/run").read_text("utf-8")


def test_readme_names_files_that_exist() -> None:
    text = (ROOT / "README.md").read_text("utf-8")
    named = set(re.findall(r"\b(?:geometries|fluidev|tests|benchmarks)/[\w/]+\.\w+", text))
    assert named
    assert [name for name in sorted(named) if not (ROOT / name).is_file()] == []


@pytest.fixture(scope="module")
def example(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The case that README tells its reader to save, in a folder of its own."""
    blocks = fenced_blocks((ROOT / "README.md").read_text("utf-8"))
    file = tmp_path_factory.mktemp("readme") / "mine.toml"
    file.write_text(next(content for language, content in blocks if language == "toml"), "utf-8")
    return file


def test_readme_example_reads_what_readme_says(example: Path) -> None:
    import fluidev

    blocks = fenced_blocks((ROOT / "README.md").read_text("utf-8"))
    shown = next(content for language, content in blocks if language == "text")
    case = fluidev.load(example)
    flow = fluidev.solve(case)
    assert len(flow.contacts) == 4
    assert case.readings
    for reading in case.readings:
        row = next(line for line in shown.splitlines() if line.startswith(f"{reading.name} "))
        said = [
            float(number.replace("−", "-")) * (1e-3 if milli else 1.0)
            for number, milli in re.findall(r"(−?[\d.]+)(?: ± \S+)? (m?)Ω", row)
        ]
        resistance = flow.resistance(current=reading.current, voltage=reading.voltage)
        ohmic = flow.ohmic(current=reading.current, voltage=reading.voltage)
        assert said == [pytest.approx(resistance.value, rel=2e-3), pytest.approx(ohmic, rel=2e-3)]


def test_readme_commands_run(example: Path) -> None:
    blocks = fenced_blocks((ROOT / "README.md").read_text("utf-8"))[2:]
    lines = "".join(content for language, content in blocks if language == "sh").splitlines()
    commands = [shlex.split(line, comments=True) for line in lines]
    assert len(commands) >= 3
    for program, *arguments in commands:
        assert program == ".venv/bin/fluidev"
        status, said, _ = run_fluidev(*arguments, cwd=example.parent)
        assert status == 0, said
    assert list(example.parent.glob("mine.map/*.png")) != []


def test_readme_python_runs(monkeypatch: pytest.MonkeyPatch) -> None:
    blocks = fenced_blocks((ROOT / "README.md").read_text("utf-8"))
    script = next(content for language, content in blocks if language == "python")
    monkeypatch.chdir(ROOT)
    names: dict[str, object] = {}
    exec(script, names)
    assert "flow" in names


def test_top_level_holds_only_what_belongs_there() -> None:
    names = {path.parts[0] for path in repository_files()}
    assert "fluidev" in names
    assert {name for name in names if not name.startswith(".")} - TOP_LEVEL == set()


def test_no_module_is_longer_than_500_lines() -> None:
    lengths = {
        str(module.relative_to(ROOT)): len(module.read_text("utf-8").splitlines())
        for module in MODULES
    }
    assert len(lengths) > 10
    assert {name: length for name, length in lengths.items() if length > 500} == {}


def test_help_imports_nothing_heavy() -> None:
    status, said, imported = run_fluidev("--help")
    assert status == 0, said
    assert imported & HEAVY == set()


@pytest.mark.parametrize(
    ("setting", "key"),
    [
        ("fluid.gurzhi_length=0.3 ohm", "fluid.gurzhi_length"),
        ("device.walls.slip=0 um", "device.walls.slip"),
        ("device.contact=[]", "device.contact"),
    ],
)
def test_a_users_mistake_imports_nothing_heavy(setting: str, key: str, tmp_path: Path) -> None:
    case = ROOT / "geometries" / "spur_bar.toml"
    status, said, imported = run_fluidev("resist", str(case), "--set", setting, cwd=tmp_path)
    assert status == 2, said
    assert key in said
    assert imported & HEAVY == set()
    assert list(tmp_path.iterdir()) == []


def public_definitions(module: Path) -> list[tuple[str, ast.AST]]:
    """(name, node) of the module, its public functions and classes and their public methods."""
    tree = ast.parse(module.read_text("utf-8"))
    name = ".".join(module.relative_to(ROOT).with_suffix("").parts)
    found: list[tuple[str, ast.AST]] = [(name, tree)] if tree.body else []
    functions = (ast.FunctionDef, ast.AsyncFunctionDef)
    for node in tree.body:
        if isinstance(node, (*functions, ast.ClassDef)) and not node.name.startswith("_"):
            found.append((f"{name}.{node.name}", node))
        if isinstance(node, ast.ClassDef) and not node.name.startswith("_"):
            found += [
                (f"{name}.{node.name}.{method.name}", method)
                for method in node.body
                if isinstance(method, functions) and not method.name.startswith("_")
            ]
    return found


def test_everything_public_has_a_docstring() -> None:
    definitions = [pair for module in MODULES for pair in public_definitions(module)]
    assert len(definitions) > 50
    assert [name for name, node in definitions if not ast.get_docstring(node)] == []


def test_no_committed_text_holds_a_path_of_somebodys_machine() -> None:
    # An absolute path into a place that only one machine has.
    path = re.compile(r"(?<![\w.)/*])/(?:home|root|Users|work|tmp|mnt)/|\b[A-Z]:\\\\?Users")
    seen, bad = 0, []
    for name in repository_files():
        data = (ROOT / name).read_bytes()
        if b"\0" in data:
            continue
        seen += 1
        bad += [f"{name}: {match[0]}" for match in path.finditer(data.decode("utf-8"))]
    assert seen > 10
    assert bad == []


def test_the_import_contract_covers_every_room() -> None:
    with (ROOT / "pyproject.toml").open("rb") as file:
        layers = tomllib.load(file)["tool"]["importlinter"]["contracts"][0]["layers"]
    placed = {room.strip() for layer in layers for room in layer.split("|")}
    rooms = {path.parent.name for path in (ROOT / "fluidev").glob("*/__init__.py")}
    rooms |= {path.stem for path in (ROOT / "fluidev").glob("*.py") if path.stem[0] != "_"}
    assert rooms == placed
