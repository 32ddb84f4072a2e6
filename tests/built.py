"""A small filter with every choice fixed, designed once for all tests of what comes after."""

from __future__ import annotations

import atexit
import shutil
import tempfile
from functools import cache
from pathlib import Path

from layoutgen.design import Design, design
from layoutgen.spec import load_spec

NUMBER = "LK-3"

SPEC = """\
[part]
number = "LK-3"
title = "Link filter <S & T>"

[passband]
lower = "1.90 GHz"
upper = "2.02 GHz"
return_loss = "14 dB"
insertion_loss = "4 dB"
order = 3

[margin]
return_loss = "3 dB"

[[stopband]]
from = "2.40 GHz"
to = "2.70 GHz"
rejection = "25 dB"

[construction]
substrate = "hydrocarbon-ceramic-3.55"
thickness = "0.508 mm"
line_width = "1.1 mm"

[load]
case = "0402"
value = "1.2 pF"

[short]
count = 2
"""


def write_spec(folder: Path) -> Path:
    """The specification as a file in a folder."""
    path = folder / "link.toml"
    path.write_text(SPEC, encoding="utf-8")
    return path


@cache
def small_design() -> Design:
    """The design of it; its specification file stays for the whole session."""
    folder = Path(tempfile.mkdtemp(prefix="layoutgen-test-"))
    atexit.register(shutil.rmtree, folder, ignore_errors=True)
    return design(load_spec(write_spec(folder)))


def contents(folder: Path) -> dict[str, bytes | None]:
    """Everything below a folder, by relative path: bytes of files, None for folders."""
    return {
        str(path.relative_to(folder)): path.read_bytes() if path.is_file() else None
        for path in sorted(folder.rglob("*"))
    }
