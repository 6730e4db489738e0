"""Whatever goes wrong: one line on stderr and the exit code that says whose fault it is."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import click
import pytest
from click.testing import Result

from insol.cli.faults import STOPPED, exit_code_of, line_and_code, without_traceback_option
from insol.errors import InsolError, StudyError

Run = Callable[..., Result]


def the_line(result: Result, code: int) -> str:
    """The one line of a refusal."""
    assert result.exit_code == code, result.output
    assert result.stdout == ""
    assert result.stderr.count("\n") == 1
    assert result.stderr.startswith("insol: ")
    return result.stderr.removeprefix("insol: ").rstrip("\n")


def test_a_wrong_study_is_one_line(insol: Run, place: Path) -> None:
    study = place / "study.toml"
    study.write_text(study.read_text(encoding="utf-8").replace("spacing_m = 4", "spacing = 4"), encoding="utf-8")
    for command in (["check", "study.toml"], ["run", "study.toml", "--out", "result"]):
        assert the_line(insol(*command), 2) == (
            'study.toml, line 17, measure[1] "facades".spacing: the key "spacing" is not known. '
            'did you mean "spacing_m"?'
        )
    assert not (place / "result").exists()


@pytest.mark.parametrize(
    ("args", "said"),
    [
        (["chek"], 'there is no command "chek". did you mean "check"? (insol --help tells more)'),
        (["xyz"], 'there is no command "xyz". commands: "new", "check", "run", "view" (insol --help tells more)'),
        (
            ["run", "study.toml", "--ouf", "x"],
            'there is no option --ouf; did you mean "--out"? (insol run --help tells more)',
        ),
        (["run", "study.toml"], "missing option '--out' (insol run --help tells more)"),
        (["run", "--out", "x"], "missing argument 'STUDY' (insol run --help tells more)"),
        (
            ["run", "study.toml", "--out", "x", "--engine", "cuda"],
            "invalid value for '--engine': 'cuda' is not one of 'auto', 'embree', 'numpy' (insol run --help",
        ),
        (
            ["run", "study.toml", "--out", "x", "--threads", "0"],
            "invalid value for '--threads': 0 is not in the range 1<=x<=1024 (insol run --help tells more)",
        ),
        (
            ["check", "study.toml", "block.obj"],
            "one study or some models can be checked, not both together (insol check --help tells more)",
        ),
        (["check", "stduy.toml"], 'stduy.toml: there is no such study file. did you mean "study.toml"?'),
        (["check", "."], ".: this is a folder, not a study file. in it is study.toml"),
        (["check", "blok.obj"], 'blok.obj: there is no such file. did you mean "block.obj"'),
        (["new", "block.obj"], "study.toml: there is such a file already. give another name with --out, "
                               "or replace it with --force"),
        (["new", "block.obj", "--out", "."], ".: this is a folder. give the name of the study file"),
        (["new", "block.obj", "--out", "no/s.toml"], "the folder that should hold the study does not exist"),
        (["new", "block.obj", "--out", "s.toml", "--latitude", "95"],
         "--latitude: must be a number from -90 to 90 [degrees], not 95.0"),
        (["new", "block.obj", "--out", "s.toml", "--units", "feet"],
         '--units: must be "mm", "cm", "m", "in" or "ft", not "feet". did you mean "ft"?'),
        (["new", "block.obj", "--out", "s.toml", "--time-zone", "Europe/Lundon"],
         '--time-zone: "Europe/Lundon" is not a time zone'),
    ],
)  # fmt: skip
def test_mistakes_on_the_command_line(insol: Run, place: Path, args: list[str], said: str) -> None:
    before = sorted(place.iterdir())
    assert said in the_line(insol(*args), 2)
    assert sorted(place.iterdir()) == before


@pytest.mark.parametrize(
    ("failed", "line", "code"),
    [
        (StudyError("must be a name", where="study.toml, line 3"), "study.toml, line 3: must be a name", 2),
        (InsolError("no way out"), "no way out", 1),
        (KeyboardInterrupt(), STOPPED, 130),
        (click.Abort(), STOPPED, 130),
        (ValueError("x\ny"), "ValueError: x y. this is a fault of the program; --traceback shows where it arose", 1),
        (OSError(28, "No space left on device", "r/faces.csv"),
         "r/faces.csv: No space left on device. free some space, or write to another place", 2),
        (PermissionError(13, "Permission denied", "r"),
         "r: Permission denied. the folder or file is not yours to read or write", 2),
        (MemoryError(), "the memory of this machine does not suffice. "
                        "a larger spacing_m, fewer parts or a shorter period needs less", 2),
    ],
)  # fmt: skip
def test_every_exception_has_a_line_and_a_code(failed: BaseException, line: str, code: int) -> None:
    assert line_and_code(failed) == (line, code)


def failing(error: BaseException) -> Callable[[], object]:
    def fail() -> object:
        raise error

    return fail


def test_a_traceback_is_shown_only_when_asked_for(capsys: pytest.CaptureFixture[str]) -> None:
    assert exit_code_of(failing(ValueError("odd")), traceback_wanted=False) == 1
    assert "Traceback" not in capsys.readouterr().err
    assert exit_code_of(failing(ValueError("odd")), traceback_wanted=True) == 1
    said = capsys.readouterr().err
    assert "Traceback" in said
    assert said.splitlines()[-1].startswith("insol: ValueError: odd")


def test_the_traceback_option_may_stand_anywhere(monkeypatch: pytest.MonkeyPatch, insol: Run, place: Path) -> None:
    monkeypatch.delenv("INSOL_TRACEBACK", raising=False)
    assert without_traceback_option(["run", "--traceback", "s"]) == (["run", "s"], True)
    assert without_traceback_option(["run", "--", "--traceback"]) == (["run", "--", "--traceback"], False)
    monkeypatch.setenv("INSOL_TRACEBACK", "1")
    assert without_traceback_option(["run"]) == (["run"], True)
    assert "Traceback" in insol("check", "nothing.toml").stderr


def test_a_reader_that_has_enough_is_no_fault(place: Path) -> None:
    """The pipe is closed before anything is written to it."""
    code = (
        "import os, sys; from insol.cli.main import main\n"
        "r, w = os.pipe(); os.close(r); os.dup2(w, 1)\n"
        "sys.argv = ['insol', 'check', 'block.obj']; main()"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=False, env=_environment(), cwd=place
    )
    assert (done.returncode, done.stderr) == (141, "")


def test_ctrl_c_is_a_line_and_130(place: Path) -> None:
    code = (
        "import sys, insol.study.reading, _thread; from insol.cli.main import main\n"
        "def interrupted(path): raise KeyboardInterrupt\n"
        "insol.study.reading.load_study = interrupted\n"
        "sys.argv = ['insol', 'check', 'study.toml']; main()"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=False, env=_environment(), cwd=place
    )
    assert done.returncode == 130
    assert done.stderr.strip() == f"insol: {STOPPED}"


def _environment() -> dict[str, str]:
    import insol

    root = str(Path(insol.__file__).parents[1])
    return {**os.environ, "PYTHONPATH": root}
