"""Words on stderr for what takes long."""

from __future__ import annotations

import io
import time

import pytest

from fluidev.progress import PATIENCE, progress


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_what_is_quick_says_nothing(capsys: pytest.CaptureFixture[str]) -> None:
    assert PATIENCE == 2.0
    with progress("meshing") as step:
        step.say("solving")
    time.sleep(0.05)
    assert capsys.readouterr() == ("", "")


def test_one_plain_line_where_nobody_watches(capsys: pytest.CaptureFixture[str]) -> None:
    with progress("meshing", patience=0.01) as step:
        time.sleep(0.1)
        step.say("solving")
        with progress("drawing", patience=0.01):
            time.sleep(0.05)
    assert capsys.readouterr() == ("", "fluidev: meshing …\n")


def test_a_terminal_sees_each_step_and_is_left_clean(monkeypatch: pytest.MonkeyPatch) -> None:
    terminal = Terminal()
    monkeypatch.setattr("sys.stderr", terminal)
    monkeypatch.setenv("TERM", "xterm")
    with progress("meshing", patience=0.01) as step:
        time.sleep(0.3)
        step.say("solving")
        time.sleep(0.3)
        with progress("drawing"):
            time.sleep(0.3)
        assert step.text == "solving"
    shown = terminal.getvalue()
    assert shown.index("meshing …") < shown.index("solving …") < shown.index("drawing …")
    assert shown.endswith("\x1b[2K")  # the line is wiped
    with progress("again", patience=10.0):
        pass
    assert terminal.getvalue() == shown


def test_an_error_ends_the_step(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(ZeroDivisionError), progress("meshing", patience=0.05):
        raise ZeroDivisionError
    time.sleep(0.1)
    assert capsys.readouterr() == ("", "")
    with progress("meshing", patience=0.01):
        time.sleep(0.1)
    assert capsys.readouterr().err == "fluidev: meshing …\n"
