"""The command line as a whole: help, usage, exit statuses."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import NoReturn

import pytest

import fluidev
from fluidev.cli.main import COMMANDS, main
from tests.cli.cases import BAR, made_up_flow

ROOT = Path(__file__).resolve().parents[2]


def test_help_and_version(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--help"]) == 0
    shown = capsys.readouterr().out
    for command in COMMANDS:
        assert command.name in shown
        assert main([command.name, "--help"]) == 0
        own = capsys.readouterr().out
        for word in ("CASE", "--set KEY=VALUE", "--out DIR"):
            assert word in own
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"fluidev {fluidev.__version__}\n"


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        ([], "the following arguments are required: COMMAND; see fluidev --help"),
        (["chek", "bar.toml"], "COMMAND: invalid choice: 'chek' (choose from "),
        (["resist"], "the following arguments are required: CASE; see fluidev resist --help"),
        (["resist", "bar.toml", "--josn", "x"], "unrecognized arguments: --josn x; did you mean"),
        (["resist", "bar.toml", "--jso", "x"], "unrecognized arguments: --jso x; did you mean"),
        (["resist", "bar.toml", "bar2.toml"], "unrecognized arguments: bar2.toml; see fluidev res"),
        (["map", "bar.toml", "--current", "S"], "--current: expected 2 arguments; see fluidev map"),
        (["map", "bar.toml"], "expected --current IN OUT, --reading NAME or both; see fluidev map"),
        (["check", "bar.toml", "--set"], "--set: expected one argument; see fluidev check --help"),
    ],
)
def test_a_wrong_command_line_is_one_sentence(
    arguments: list[str], sentence: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(arguments) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith(f"fluidev: {sentence}")
    assert err.count("\n") == 1


def test_the_nearest_command_is_named(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["chek", "bar.toml"]) == 2
    assert capsys.readouterr().err.endswith("did you mean 'check'?\n")


def raising(error: BaseException) -> object:
    def solve(case: fluidev.Case) -> NoReturn:
        raise error

    return solve


@pytest.mark.parametrize(
    ("error", "status", "said"),
    [
        (
            fluidev.NumericsError("nothing limits\nthe flow"),
            1,
            "fluidev: nothing limits the flow\n",
        ),
        (KeyboardInterrupt(), 130, "fluidev: interrupted\n"),
        (BrokenPipeError(), 141, ""),
    ],
)
def test_what_becomes_of_errors(
    error: BaseException,
    status: int,
    said: str,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setattr("fluidev.api.solve", raising(error))
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    assert main(["resist", str(tmp_path / "bar.toml")]) == status
    assert capsys.readouterr() == ("", said)


def test_an_error_of_our_own_is_not_hidden(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("fluidev.api.solve", raising(ZeroDivisionError()))
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    with pytest.raises(ZeroDivisionError):
        main(["resist", str(tmp_path / "bar.toml")])


def test_overrides_reach_the_case(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    solved = []

    def solve(case: fluidev.Case) -> object:
        solved.append(case)
        return made_up_flow(case)

    monkeypatch.setattr("fluidev.api.solve", solve)
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    given = ["--set", "fluid.gurzhi_length=1 um", "--set=device.walls.slip_length=inf",
             "--set", "reading[1].name=end to end"]  # fmt: skip
    assert main(["resist", str(tmp_path / "bar.toml"), *given]) == 0
    (case,) = solved
    assert case.fluid["gurzhi_length"] == "1 um"
    assert case.device.walls.slip_length == float("inf")
    assert "end to end" in capsys.readouterr().out


def start(*arguments: str, cwd: Path, **pipes: int) -> subprocess.Popen[bytes]:
    return subprocess.Popen(
        [sys.executable, *arguments],
        cwd=cwd,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        stderr=subprocess.PIPE,
        **pipes,  # type: ignore[call-overload]
    )


@pytest.mark.skipif(os.name == "nt", reason="POSIX pipes")
@pytest.mark.parametrize("unbuffered", ["", "1"])
def test_a_reader_that_leaves_is_no_error(
    unbuffered: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PYTHONUNBUFFERED", unbuffered)
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    script = (
        "import sys, fluidev.api\n"
        "from tests.cli.cases import made_up_flow\n"
        "fluidev.api.solve = made_up_flow\n"
        "from fluidev.cli.main import main\n"
        "sys.exit(main(sys.argv[1:]))\n"
    )
    for arguments, statuses in ((["resist", "bar.toml"], {141}), (["--help"], {0, 141})):
        process = start("-c", script, *arguments, cwd=tmp_path, stdout=subprocess.PIPE)
        assert process.stdout is not None
        process.stdout.close()
        _, said = process.communicate(timeout=60)
        assert said == b""
        assert process.returncode in statuses


@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
def test_interrupted_from_a_terminal(tmp_path: Path) -> None:
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    script = (
        "import sys, time, fluidev.api\n"
        "def solve(case):\n"
        "    print('solving', flush=True)\n"
        "    time.sleep(60)\n"
        "fluidev.api.solve = solve\n"
        "from fluidev.cli.main import main\n"
        "sys.exit(main(['resist', 'bar.toml', '--json', 'result.json']))\n"
    )
    process = start("-c", script, cwd=tmp_path, stdout=subprocess.PIPE)
    assert process.stdout is not None
    assert process.stdout.readline() == b"solving\n"
    process.send_signal(signal.SIGINT)
    _, said = process.communicate(timeout=60)
    assert said == b"fluidev: interrupted\n"
    assert process.returncode == 130
    assert [path.name for path in tmp_path.iterdir()] == ["bar.toml"]


def test_python_dash_m_and_its_time(tmp_path: Path) -> None:
    began = time.perf_counter()
    done = start("-m", "fluidev", "--help", cwd=tmp_path, stdout=subprocess.PIPE)
    shown, said = done.communicate(timeout=60)
    print(f"--help: {time.perf_counter() - began:.2f} s")
    assert done.returncode == 0
    assert said == b""
    assert shown.startswith(b"usage: fluidev ")


def test_letters_that_the_terminal_lacks(tmp_path: Path) -> None:
    (tmp_path / "bar.toml").write_text(BAR, "utf-8")
    for arguments, status in ((["resist", "bar.toml", "--set", "title"], 2), (["--help"], 0)):
        done = subprocess.run(
            [sys.executable, "-m", "fluidev", *arguments],
            cwd=tmp_path,
            env={**os.environ, "PYTHONPATH": str(ROOT), "PYTHONIOENCODING": "ascii"},
            capture_output=True,
            check=False,
        )
        assert done.returncode == status
        assert b"Traceback" not in done.stderr
