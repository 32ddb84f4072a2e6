"""``layoutgen new`` and ``substrates``."""

from __future__ import annotations

import json

import pytest
from built import contents

from layoutgen.library import default_library
from layoutgen.spec import load_spec


def test_the_starter_builds_as_it_stands(run, here):
    written = run("new", "my-filter.toml")
    built = run("build", "my-filter.toml", "--json")

    assert (written.code, written.err) == (0, "")
    assert "my-filter.toml" in written.out
    assert (built.code, built.err) == (0, "")
    assert json.loads(built.out)["number"] == "my-filter"
    assert (here / "outputs" / "my-filter" / "my-filter.gds").is_file()


def test_an_existing_file_is_not_overwritten(run, here):
    before = contents(here)

    outcome = run("new", "link.toml")

    assert outcome.code == 2
    assert "exists already" in outcome.err
    assert contents(here) == before


@pytest.mark.parametrize(
    ("name", "number"),
    [
        ("plain.toml", "plain"),
        ("without-end", "without-end"),
        ("two words.toml", "two-words"),
        (".hidden.toml", "hidden"),
        ("größe.toml", "gr-e"),
        ("a.b.toml", "a.b"),
        ("x" * 80 + ".toml", "x" * 64),
        ("-dash.toml", "dash"),
    ],
)
def test_the_part_number_comes_from_the_file_and_is_a_valid_one(run, here, name, number):
    assert run("new", f"./{name}").code == 0

    assert load_spec(here / name).part.number == number


@pytest.mark.parametrize(
    ("path", "says"),
    [
        ("nowhere/f.toml", "cannot be written"),
        ("---.toml", "part number"),
        ("link.toml/f.toml", "cannot be written"),
        (".", "part number"),
        ("y" * 300 + ".toml", "cannot be written"),
    ],
)
def test_a_file_that_cannot_be_made_is_refused(run, here, path, says):
    before = contents(here)

    outcome = run("new", "--", path)

    assert outcome.code == 2
    assert says in outcome.err
    assert "Traceback" not in outcome.err
    assert contents(here) == before


def test_the_list_shows_every_laminate_within_80_columns(run):
    outcome = run("substrates")

    assert outcome.code == 0
    assert max(len(line) for line in outcome.out.splitlines()) <= 80
    rows = {
        line.split()[0]: line.split()[1:3] for line in outcome.out.splitlines() if line and line[0].isalpha()
    }
    for laminate in default_library().laminates():
        assert [float(word) for word in rows[laminate.name]] == [laminate.eps_r, laminate.tan_delta]


@pytest.mark.parametrize("name", ["ptfe-ceramic-10.70", "0603", "advanced"])
def test_an_entry_is_shown_whole(run, name):
    outcome = run("substrates", name)
    source = next(
        entry.source
        for entry in (
            *default_library().laminates(),
            *default_library().chip_cases(),
            *default_library().shops(),
        )
        if entry.name == name
    )

    assert outcome.code == 0
    assert max(len(line) for line in outcome.out.splitlines()) <= 80
    assert " ".join(source.split()) in " ".join(outcome.out.split())


def test_a_laminate_is_shown_with_units_and_tolerances(run):
    flat = " ".join(run("substrates", "hydrocarbon-ceramic-3.55").out.split())

    for words in (
        "eps_r 3.55",
        "eps_r_process 3.38",
        "tan_delta 0.0027",
        "40 ppm/K",
        "10 GHz",
        "nominal 0.813 mm; tolerance 0.051 mm",
        "base 18 um; roughness 1.8 um; conductivity 58 MS/m",
    ):
        assert words in flat


def test_an_unknown_entry_is_refused_with_the_nearest(run):
    outcome = run("substrates", "ptfe-ceramic-10.07")

    assert outcome.code == 2
    assert 'did you mean "ptfe-ceramic-10.70"' in outcome.err


def test_a_laminate_of_the_user_is_shown_from_its_file(run, here):
    path = default_library().laminate("alumina-9.80").path
    text = path.read_text(encoding="utf-8").replace('description = "', 'description = "Lot 7, ')
    (here / "alumina-9.80.toml").write_text(text, encoding="utf-8")

    outcome = run("substrates", "alumina-9.80.toml")

    assert outcome.code == 0
    assert "Lot 7, " in outcome.out


def test_a_faulty_library_is_refused_with_its_faults(run, here):
    (here / "mine").mkdir()
    (here / "mine" / "odd.toml").write_text('name = "odd"')

    outcome = run("substrates", "--substrates", "mine")

    assert outcome.code == 2
    assert "odd.toml" in outcome.err
    assert "Traceback" not in outcome.err
