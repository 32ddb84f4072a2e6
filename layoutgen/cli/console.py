"""What the commands print through."""

from __future__ import annotations

import contextlib
import os
import sys
from collections.abc import Iterator
from typing import TextIO

__all__ = ["Console"]


class Console:
    """Standard output for results, standard error for progress and faults.

    A reader that closes the pipe early (``layoutgen substrates | head``) ends the printing, not the work.

    Parameters
    ----------
    quiet : bool
        Print nothing but faults and results that were asked for.
    """

    def __init__(self, *, quiet: bool = False) -> None:
        self.quiet = quiet

    def say(self, text: str) -> None:
        """Print a result for people; not when quiet."""
        if not self.quiet:
            self.result(text)

    def result(self, text: str) -> None:
        """Print a result, quiet or not."""
        _write(sys.stdout, text)

    def progress(self, text: str) -> None:
        """Say what takes its time, to people who watch a terminal."""
        if not self.quiet and sys.stderr.isatty():
            _write(sys.stderr, f"{text} ...")

    def complain(self, text: str) -> None:
        """Print a fault."""
        _write(sys.stderr, text)

    def close(self) -> None:
        """Hand over everything that is still on its way."""
        for stream in (sys.stdout, sys.stderr):
            with _broken_pipe_ends(stream):
                stream.flush()


def _write(stream: TextIO, text: str) -> None:
    encoding = stream.encoding or "utf-8"
    known = text.encode(encoding, "backslashreplace").decode(encoding)  # a terminal may lack letters
    with _broken_pipe_ends(stream):
        stream.write(known if known.endswith("\n") else known + "\n")


@contextlib.contextmanager
def _broken_pipe_ends(stream: TextIO) -> Iterator[None]:
    try:
        yield
    except BrokenPipeError:
        # nobody reads: what follows, the interpreter's own last flush included, goes nowhere
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, stream.fileno())
        os.close(nowhere)
