"""Whatever is wrong with the input: exit code 2, a sentence that helps, nothing written, no traceback."""

from __future__ import annotations

from pathlib import Path

import pytest
from built import SPEC, contents

FILES: dict[str, bytes] = {
    "empty.toml": b"",
    "words.toml": b"this is not toml",
    "latin.toml": SPEC.replace("Link filter", "Br\u00fccke").encode("latin-1"),
    "typo.toml": SPEC.replace("insertion_loss", "insertion_los").encode(),
    "bare.toml": SPEC.replace('"1.90 GHz"', "1.9").encode(),
    "swapped.toml": SPEC.replace("1.90 GHz", "2.20 GHz").encode(),
    "overlap.toml": SPEC.replace("2.40 GHz", "2.00 GHz").encode(),
    "both.toml": SPEC.replace("order = 3", 'order = 3\nripple = "0.1 dB"').encode(),
    "laminate.toml": SPEC.replace("hydrocarbon-ceramic-3.55", "hydrocarbon-ceramic-3.56").encode(),
    "thickness.toml": SPEC.replace("0.508 mm", "0.5 mm").encode(),
    "number.toml": SPEC.replace("LK-3", "LK/3").encode(),
    "long.toml": SPEC.replace('"LK-3"', '"' + "L" * 65 + '"').encode(),
    "narrow.toml": SPEC.replace("2.02 GHz", "1.905 GHz").encode(),
    "line.toml": SPEC.replace("1.1 mm", "0.1 mm").encode(),
    "heavy.toml": SPEC.replace("1.2 pF", "20 pF").encode(),
}
"""Faulty specifications by name."""

SAYS = {
    "empty.toml": "is empty",
    "words.toml": "not valid TOML",
    "latin.toml": "not UTF-8",
    "typo.toml": "insertion_loss",
    "bare.toml": "unit",
    "swapped.toml": "passband",
    "overlap.toml": "stopband.1",
    "both.toml": "ripple",
    "laminate.toml": "hydrocarbon-ceramic-3.55",
    "thickness.toml": "0.508",
    "number.toml": "part.number",
    "long.toml": "part.number",
    "narrow.toml": "band",
    "line.toml": "construction.line_width",
    "heavy.toml": "load",
}


@pytest.fixture
def faulty(here: Path) -> Path:
    for name, content in FILES.items():
        (here / name).write_bytes(content)
    (here / "folder.toml").mkdir()
    return here


def assert_refused(outcome, *words: str) -> None:
    assert outcome.code == 2, outcome
    assert outcome.out == ""
    assert "Traceback" not in outcome.err
    for word in words:
        assert word in outcome.err


@pytest.mark.parametrize("verb", ["plan", "build"])
@pytest.mark.parametrize("name", FILES)
def test_a_faulty_specification_is_refused(run, faulty, verb, name):
    before = contents(faulty)

    assert_refused(run(verb, name), name, SAYS[name])

    assert contents(faulty) == before


@pytest.mark.parametrize("verb", ["plan", "build"])
@pytest.mark.parametrize(
    ("name", "says"),
    [
        ("absent.toml", "does not exist"),
        ("folder.toml", "is a directory"),
        ("link.toml/x.toml", "link.toml/x.toml"),
    ],
)
def test_a_file_that_is_none_is_refused(run, faulty, verb, name, says):
    assert_refused(run(verb, name), name, says)


def test_every_fault_is_told_at_once(run, here):
    (here / "bad.toml").write_text(
        SPEC.replace("1.90 GHz", "1.90 Ghz").replace("25 dB", "-25 dB").replace("0402", "0401")
    )

    outcome = run("build", "bad.toml")

    assert_refused(outcome, "passband.lower", "stopband.1.rejection", "load.case")
    assert len(outcome.err.splitlines()) == 3


@pytest.mark.parametrize(
    ("words", "says"),
    [
        (("--set", "passband.loewr=1.9 GHz"), "passband.lower"),
        (("--set", "passband.lower"), "KEY=VALUE"),
        (("--set", "substrate.eps_r=0.5"), "substrate.eps_r"),
        (("--set", "construction.thickness=0.6 mm"), "--set"),
        (("--substrates", "nowhere"), "--substrates"),
        (("--substrates", "link.toml"), "--substrates"),
    ],
)
def test_faulty_options_are_refused(run, here, words, says):
    before = contents(here)

    assert_refused(run("build", "link.toml", *words), says)

    assert contents(here) == before


@pytest.mark.parametrize(
    "words",
    [
        (),
        ("bild", "link.toml"),
        ("build",),
        ("build", "link.toml", "other.toml"),
        ("build", "link.toml", "--colour"),
        ("plan", "link.toml", "--out", "x"),
        ("build", "link.toml", "--js"),
        ("new",),
        ("build", "link.toml", "--set"),
    ],
    ids=" ".join,
)
def test_words_that_make_no_command_are_refused(run, here, words):
    outcome = run(*words)

    assert outcome.code == 2
    assert outcome.err.startswith("usage: layoutgen")


@pytest.mark.parametrize(
    ("out", "says"),
    [
        ("link.toml", "is a file"),
        ("link.toml/package", "is a file"),
        ("photos", "other than a package"),
        ("shortcut", "is a link"),
        (".", "the folder you are in"),
        ("..", "the folder you are in"),
        ("x" * 300, "too long"),
        ("/proc/nothing/package", "cannot be"),
    ],
)
def test_a_place_that_cannot_be_written_is_refused(run, here, out, says):
    (here / "photos").mkdir()
    (here / "photos" / "boat.jpg").write_bytes(b"boat")
    (here / "shortcut").symlink_to(here / "photos")
    before = contents(here)

    assert_refused(run("build", "link.toml", "--out", out), out, says)

    assert contents(here) == before


def test_a_part_number_is_checked_even_when_the_place_is_given(run, faulty):
    assert_refused(run("build", "number.toml", "--out", "package"), "part.number", "LK/3")
    assert not (faulty / "package").exists()
