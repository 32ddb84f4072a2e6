"""Whole commands, in this process and in one of their own."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

import pytest

from layoutgen.cli import main

HERE_PYTHON = [
    sys.executable,
    "-W",
    "error",
    "-c",
    "import sys; from layoutgen.cli import main; sys.exit(main())",
]


@dataclass(frozen=True)
class Outcome:
    """What a command said and how it ended."""

    code: int
    out: str
    err: str


class Runner:
    """Runs commands in this process and keeps what they print."""

    def __init__(self, capsys: pytest.CaptureFixture[str]) -> None:
        self._capsys = capsys

    def __call__(self, *words: str | Path) -> Outcome:
        self._capsys.readouterr()
        try:
            code = main([str(word) for word in words])
        except SystemExit as stop:  # how the argument parser ends
            code = int(str(stop.code))
        said = self._capsys.readouterr()
        return Outcome(code, said.out, said.err)


def in_its_own_process(*words: str | Path, cwd: Path, **environment: str) -> Outcome:
    """Run a command as a user does."""
    done = subprocess.run(
        [*HERE_PYTHON, *map(str, words)],
        cwd=cwd,
        capture_output=True,
        text=True,
        env={**os.environ, **environment},
        check=False,
        timeout=120,
    )
    return Outcome(done.returncode, done.stdout, done.stderr)
