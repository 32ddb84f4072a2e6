"""``layoutgen build`` and ``plan``, as a user runs them."""

from __future__ import annotations

import json
import re
from xml.etree import ElementTree

import pytest
from built import contents

from commands.running import in_its_own_process
from layoutgen.package import FILES

NUMBER = "LK-3"


def widest(text: str) -> int:
    return max(len(line) for line in text.splitlines())


def test_a_build_writes_the_whole_package_where_it_says(delivered):
    assert {path.name for path in delivered.iterdir()} == {NUMBER + ending for ending in FILES}
    assert [path.name for path in delivered.parent.iterdir()] == [NUMBER]


def test_the_summary_says_what_an_engineer_asks(delivered):
    summary = (delivered / f"{NUMBER}-summary.txt").read_text(encoding="utf-8")

    assert widest(summary) <= 80
    assert "Every requirement is met" in summary
    assert summary.count("\npass  ") == 3
    assert "FAIL" not in summary
    flat = " ".join(summary.split())
    for words in (
        "base foil 18 um + plating 25 um = 43 um finished",
        "0.300 mm finished, 0.400 mm tool",
        "coupling k",
        "external Q",
        "unloaded Q",
        "first spurious",
        "conductor",
        "dielectric",
        "board.grid = 1 um",
        "Cautions",
        "licence",
        "open ends",
        f"{NUMBER}.gds",
        "3 dB deeper",
    ):
        assert words in flat


def test_the_pictures_are_well_formed_and_titled(delivered):
    for ending, what in (("-layout.svg", "layout"), ("-response.svg", "predicted response")):
        root = ElementTree.fromstring((delivered / (NUMBER + ending)).read_text(encoding="utf-8"))
        space = "{http://www.w3.org/2000/svg}"
        assert root.findtext(f"{space}title") == f"{NUMBER}, {what}"
        assert len(root.findtext(f"{space}desc") or "") > 100
        # the title of the part holds characters that mean something in XML
        assert any("Link filter <S & T>" in (text.text or "") for text in root.iter(f"{space}text"))


def test_the_layout_picture_is_to_scale(delivered):
    record = json.loads((delivered / f"{NUMBER}.json").read_text())
    root = ElementTree.fromstring((delivered / f"{NUMBER}-layout.svg").read_text(encoding="utf-8"))
    _, _, across, down = (float(v) for v in root.attrib["viewBox"].split())
    width, height = (float(root.attrib[key].removesuffix("mm")) for key in ("width", "height"))
    board = next(g for g in root.iter() if g.attrib.get("id") == "board-outline")
    corners = [tuple(map(float, pair)) for pair in re.findall(r"([-\d.]+) ([-\d.]+)", board[0].attrib["d"])]

    assert width / across == pytest.approx(height / down, rel=1e-3)  # printed to 0.01 mm
    assert max(corners) == (record["board"]["width_mm"], record["board"]["height_mm"])
    assert across > record["board"]["width_mm"]


def test_the_same_input_gives_the_same_bytes_in_another_process_and_place(delivered, tmp_path):
    (tmp_path / "link.toml").write_bytes((delivered / f"{NUMBER}-spec.toml").read_bytes())
    outcome = in_its_own_process(
        "build", "link.toml", "--out", "over/there", cwd=tmp_path, PYTHONHASHSEED="77", TZ="Asia/Tokyo"
    )

    assert outcome.code == 0
    assert contents(tmp_path / "over" / "there") == contents(delivered)


def test_the_outcome_can_be_read_by_a_program(run, here):
    outcome = run("build", "link.toml", "--json", "--quiet", "--out", "package")
    found = json.loads(outcome.out)

    assert (outcome.code, outcome.err) == (0, "")
    assert (found["number"], found["directory"], found["met"]) == (NUMBER, "package", True)
    assert {file["name"] for file in found["files"]} == {path.name for path in (here / "package").iterdir()}
    assert [r["met"] for r in found["requirements"]] == [True, True, True]


def test_a_missed_requirement_delivers_and_says_why(run, here):
    outcome = run("build", "link.toml", "--set", "passband.insertion_loss=1.5 dB")
    flat = " ".join(outcome.out.split())

    assert outcome.code == 3
    assert "1 of 3 requirements is MISSED" in flat
    assert re.search(r"FAIL insertion loss.*?1.5 dB predicted [\d.]+ dB, short by [\d.]+ dB", flat)
    assert re.search(r"passband.insertion_loss: missed by [\d.]+ dB. limited by: .+ would help: ", flat)
    assert widest(outcome.out) <= 80
    assert len(list((here / "outputs" / NUMBER).iterdir())) == len(FILES)


def test_overrides_act_and_are_listed(run, here, delivered):
    sets = ("--set", "passband.lower=1.91 GHz", "--set", "substrate.eps_r=3.48")
    outcome = run("build", "link.toml", *sets, "--out", "package")
    record = json.loads((here / "package" / f"{NUMBER}.json").read_text())
    summary = (here / "package" / f"{NUMBER}-summary.txt").read_text(encoding="utf-8")

    assert outcome.code in (0, 3)
    assert record["specification"]["overrides"] == ["passband.lower=1.91 GHz", "substrate.eps_r=3.48"]
    assert (record["stack_up"]["eps_r"], record["requirement"]["passband"]["lower_hz"]) == (
        3.48,
        1_910_000_000,
    )
    for text in (outcome.out, summary):
        assert "Overrides for this run" in text
        assert "substrate.eps_r=3.48" in text
    assert "values changed for this run" in (here / "package" / f"{NUMBER}.s2p").read_text()
    assert "Overrides" not in (delivered / f"{NUMBER}-summary.txt").read_text(encoding="utf-8")


def test_a_rebuild_replaces_the_package(run, here):
    assert run("build", "link.toml").code == 0
    first = contents(here / "outputs")
    assert run("build", "link.toml", "--set", "part.revision=B").code == 0

    second = contents(here / "outputs")
    assert first.keys() == second.keys()
    assert first != second


def test_a_plan_prints_everything_and_writes_nothing(run, here):
    before = contents(here)
    outcome = run("plan", "link.toml")

    assert outcome.code == 0
    assert widest(outcome.out) <= 80
    for words in (
        "Requirements against",
        "Filter",
        "Dimensions",
        "Board",
        "Material",
        "Predicted figures",
        "Insertion loss",
        "Defaults used",
    ):
        assert f"\n{words}" in outcome.out
    assert contents(here) == before


def test_a_plan_has_the_codes_of_a_build(run, here):
    assert run("plan", "link.toml", "--set", "passband.insertion_loss=1.5 dB").code == 3
    assert run("plan", "link.toml", "--set", "construction.line_width=0.1 mm").code == 2


def test_automatic_choices_are_explained(run, here):
    outcome = run("plan", "link.toml", "--set", "load.value=auto", "--set", "short.count=auto")
    flat = " ".join(outcome.out.split())

    assert outcome.code in (0, 3)
    assert re.search(r"Automatic choices -+ - load.value = [\d.]+ pF: \w+", flat)
    assert re.search(r"- short.count = \d: \w+", flat)


def test_quiet_prints_nothing(run, here):
    assert run("--quiet", "plan", "link.toml").out == ""
    assert run("plan", "link.toml", "--quiet").out == ""


def test_a_library_folder_of_the_user_is_used(run, here):
    shipped = next(
        line for line in run("substrates").out.splitlines() if line.startswith("ptfe-ceramic-3.00")
    )
    assert "3 " in shipped
    (here / "mine").mkdir()
    from layoutgen.library import default_library

    text = default_library().laminate("hydrocarbon-ceramic-3.55").path.read_text(encoding="utf-8")
    (here / "mine" / "bench-lot.toml").write_text(
        text.replace('name = "hydrocarbon-ceramic-3.55"', 'name = "bench-lot"').replace(
            "eps_r = 3.55", "eps_r = 3.61"
        )
    )

    outcome = run("plan", "link.toml", "--substrates", "mine", "--set", "construction.substrate=bench-lot")

    assert outcome.code in (0, 3)
    assert "bench-lot" in outcome.out
    assert "3.61" in outcome.out
