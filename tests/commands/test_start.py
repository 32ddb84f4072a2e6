"""How commands begin and end: help, version, interruptions, faults of our own."""

from __future__ import annotations

import subprocess
import sys

import pytest
from built import contents

import layoutgen
from commands.running import HERE_PYTHON, in_its_own_process
from layoutgen import design as design_function
from layoutgen.exports import gds, read_back

HEAVY = ("numpy", "scipy", "shapely", "gdstk", "ezdxf", "matplotlib")


@pytest.mark.parametrize(
    "words", [("--help",), ("--version",), ("build", "--help"), ("plan", "-h"), ("substrates",)]
)
def test_help_version_and_the_list_load_no_numerics(words, tmp_path):
    script = (
        "import sys; from layoutgen.cli import main\n"
        "try: main(sys.argv[1:])\n"
        "except SystemExit as stop: assert not stop.code\n"
        f"print('HEAVY', [m for m in {HEAVY} if m in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", script, *words], capture_output=True, text=True, cwd=tmp_path, check=True
    )

    assert done.stdout.endswith("HEAVY []\n")


def test_version(run):
    assert run("--version").out == f"layoutgen {layoutgen.__version__}\n"


def test_help_names_every_command_and_exit_code(run):
    outcome = run("--help")

    assert outcome.code == 0
    assert max(len(line) for line in outcome.out.splitlines()) <= 80
    for word in ("new", "plan", "build", "substrates", "exit codes", "130"):
        assert word in outcome.out


def test_a_reader_that_leaves_early_is_no_fault(tmp_path):
    process = subprocess.Popen(
        [*HERE_PYTHON, "substrates"], stdout=subprocess.PIPE, stderr=subprocess.PIPE, cwd=tmp_path
    )
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.close()
    said = process.stderr.read()
    process.stderr.close()

    assert process.wait(timeout=60) == 0
    assert said == b""


def test_letters_that_a_terminal_lacks_are_no_fault(here):
    (here / "link.toml").write_text(
        (here / "link.toml").read_text().replace("Link filter", "Filtre à ligne"), encoding="utf-8"
    )

    outcome = in_its_own_process("plan", "link.toml", cwd=here, PYTHONIOENCODING="ascii")

    assert (outcome.code, outcome.err) == (0, "")
    assert "Filtre \\xe0 ligne" in outcome.out


def break_design(monkeypatch: pytest.MonkeyPatch, fault: BaseException) -> None:
    def broken(spec: object) -> None:
        raise fault

    monkeypatch.setattr(sys.modules["layoutgen.design"], "design", broken)


def test_a_fault_of_ours_is_one_short_message(run, here, monkeypatch):
    assert callable(design_function)  # loads the room that is broken here
    break_design(monkeypatch, ZeroDivisionError("division by zero\nsecond line"))

    outcome = run("plan", "link.toml")

    assert outcome.code == 1
    assert outcome.out == ""
    assert len(outcome.err.splitlines()) == 1
    assert "ZeroDivisionError: division by zero second line" in outcome.err
    assert "--debug" in outcome.err


def test_the_traceback_of_a_fault_of_ours_is_there_for_the_asking(run, here, monkeypatch):
    assert callable(design_function)
    break_design(monkeypatch, ZeroDivisionError("division by zero"))

    for words in (("--debug", "plan", "link.toml"), ("plan", "link.toml", "--debug")):
        outcome = run(*words)
        assert outcome.code == 1
        assert "Traceback" in outcome.err


def test_an_interruption_ends_quietly_and_leaves_nothing(run, here, monkeypatch):
    before = contents(here)

    def interrupted(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(gds, "write", interrupted)
    outcome = run("build", "link.toml")

    assert (outcome.code, outcome.out, outcome.err) == (130, "", "layoutgen: interrupted\n")
    assert contents(here) == before


def test_a_failed_read_back_delivers_nothing(run, here, monkeypatch):
    before, write = contents(here), gds.write

    def cut(artwork, path) -> None:
        write(artwork, path)
        path.write_bytes(path.read_bytes()[:-100])

    monkeypatch.setattr(gds, "write", cut)
    outcome = run("build", "link.toml")

    assert (outcome.code, outcome.out) == (4, "")
    assert "LK-3.gds" in outcome.err
    assert "nothing was delivered" in outcome.err
    assert contents(here) == before
    assert callable(read_back.gds)


def test_a_disk_that_fills_up_is_no_fault_of_ours(run, here, monkeypatch):
    before = contents(here)

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(gds, "write", full)
    outcome = run("build", "link.toml")

    assert outcome.code == 2
    assert "No space left on device" in outcome.err
    assert contents(here) == before
