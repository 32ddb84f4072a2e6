"""Values changed for one run with KEY=VALUE."""

from __future__ import annotations

from pathlib import Path

import pytest

from layoutgen.errors import InputError, InputErrors
from layoutgen.library import default_library
from layoutgen.spec import load_spec, starter_text

BASE = starter_text("base").replace('case = "auto"', 'case = "0402"')


@pytest.fixture
def path(tmp_path: Path) -> Path:
    file = tmp_path / "base.toml"
    file.write_text(BASE, encoding="utf-8")
    return file


def faults_of(path: Path, *overrides: str) -> list[InputError]:
    with pytest.raises(InputErrors) as caught:
        load_spec(path, overrides=overrides)
    return list(caught.value.faults)


@pytest.mark.parametrize(
    ("override", "read", "value"),
    [
        ("passband.lower=1.93 GHz", lambda spec: spec.passband.lower, 1.93e9),
        ('passband.lower="1.93 GHz"', lambda spec: spec.passband.lower, 1.93e9),
        (" passband.lower = '1.93 GHz' ", lambda spec: spec.passband.lower, 1.93e9),
        ("passband.order=5", lambda spec: spec.passband.order, 5),
        ("stopband.1.rejection=22 dB", lambda spec: spec.stopbands[0].rejection, 22),
        ("stopband.2.to=2.7 GHz", lambda spec: spec.stopbands[1].upper, 2.7e9),
        ("board.clearance=5 mm", lambda spec: spec.board.clearance, 5e-3),
        ("part.revision=2", lambda spec: spec.part.revision, "2"),
        ("part.number=1e3", lambda spec: spec.part.number, "1e3"),
        ("part.title=a = b", lambda spec: spec.part.title, "a = b"),
        ("load.case=0603", lambda spec: spec.load.case.name, "0603"),
        ('load.series=["1.3 pF", "1.7 pF"]', lambda spec: spec.load.series, (1.3e-12, 1.7e-12)),
        ("load.series=0.1 pF", lambda spec: spec.load.series_name, "0.1 pF"),
        ("substrate.eps_r=3.48", lambda spec: spec.construction.laminate.eps_r, 3.48),
        ("substrate.eps_r=4", lambda spec: spec.construction.laminate.eps_r, 4),
        ("substrate.tan_delta=0.0041", lambda spec: spec.construction.laminate.tan_delta, 0.0041),
        ("substrate.copper.1.roughness=0.7 um", lambda spec: spec.construction.copper.roughness, 0.7e-6),
        (
            "substrate.thickness.5.tolerance=0.04 mm",
            lambda spec: spec.construction.thickness.tolerance,
            0.04e-3,
        ),
        ("case.land_gap=0.45 mm", lambda spec: spec.load.case.land_gap, 0.45e-3),
        ("case.current_height=0.1 mm", lambda spec: spec.load.case.current_height, 0.1e-3),
        ("shop.etching.1.min_gap=0.13 mm", lambda spec: spec.board.shop.min_gap(43e-6), 0.13e-3),
        ("shop.min_drill=0.2 mm", lambda spec: spec.board.shop.min_drill, 0.2e-3),
    ],
)
def test_an_override_reaches_the_specification(path, override, read, value):
    changed = load_spec(path, overrides=[override])

    assert read(changed) == value
    assert read(load_spec(path)) != value
    assert changed.overrides == (override,)


def test_an_override_changes_nothing_else_and_no_file(path):
    before = {file: file.read_bytes() for file in default_library().directories[0].rglob("*.toml")}

    changed = load_spec(path, overrides=["substrate.eps_r=3.48"])

    assert changed.construction.laminate.eps_r_process == 3.38
    assert changed.passband == load_spec(path).passband
    assert {file: file.read_bytes() for file in before} == before


def test_the_last_of_two_overrides_of_one_key_holds(path):
    assert load_spec(path, overrides=["passband.order=3", "passband.order=4"]).passband.order == 4


def test_an_override_may_be_of_a_table_the_file_does_not_have(tmp_path):
    file = tmp_path / "x.toml"
    file.write_text('[passband]\nlower = "2 GHz"\nupper = "2.1 GHz"\norder = 3\n', encoding="utf-8")

    spec = load_spec(file, overrides=["construction.substrate=alumina-9.80", "load.kind=plate"])

    assert spec.construction.laminate.name == "alumina-9.80"
    assert spec.load.kind == "plate"
    assert spec.text("load.kind") == "plate"


@pytest.mark.parametrize(
    ("override", "key", "got", "remedy"),
    [
        ("passband.lowr=1.7 GHz", "passband.lowr", "1.7 GHz", 'did you mean "passband.lower"?'),
        ("lower=1.7 GHz", "lower", "1.7 GHz", 'did you mean "passband.lower"?'),
        ("eps_r=3.5", "eps_r", "3.5", 'did you mean "substrate.eps_r"?'),
        ("substrate.eps=3.5", "substrate.eps", "3.5", 'did you mean "substrate.eps_r"?'),
        ("shop.min_gap=0.2 mm", "shop.min_gap", "0.2 mm", 'did you mean "shop.etching.1.min_gap"?'),
        ("stopband.rejection=3 dB", "stopband.rejection", "3 dB", 'did you mean "stopband.1.rejection"?'),
        ("passband=3", "passband", "3", "did you mean"),
        ("qqqq=3", "qqqq", "3", "a key is a table and a name"),
        ("=3", "", "3", "unknown key"),
        ("passband.order", "passband.order", None, "must be KEY=VALUE"),
        ("passband.order=", "passband.order", None, "has no value"),
        ("stopband.3.rejection=30 dB", "stopband.3.rejection", "30 dB", "the file has 2 [[stopband]]"),
        ("stopband.0.rejection=30 dB", "stopband.0.rejection", "30 dB", "there is no number 0"),
        ("substrate.copper.3.base=70 um", "substrate.copper.3.base", "70 um", "the file has 2 [[copper]]"),
        ("passband.order=1", "passband.order", "1", "at least 2"),
        ("passband.order=true", "passband.order", "true", "whole number"),
        ("passband.lower=1.93", "passband.lower", "1.93", "needs a unit"),
        ("passband.order=" + "[" * 3000, "passband.order", "[" * 97 + "...", "whole number"),
        ("part.number=a/b", "part.number", "a/b", "1 to 64 of the characters"),
        ("substrate.eps_r=0.9", "substrate.eps_r", "0.9", "at least 1"),
        ("substrate.eps_r=nan", "substrate.eps_r", "nan", "finite"),
        ("substrate.eps_r=high", "substrate.eps_r", "high", "bare number"),
        ("substrate.thickness.5.tolerance=1 mm", "substrate.thickness.5.tolerance", "1 mm", "smaller than"),
        ("case.land_gap=2 mm", "case.land_gap", "2 mm", "shorter than the body"),
        ("shop.aspect_ratio=0", "shop.aspect_ratio", "0", "greater than 0"),
        ("construction.substrate=nylon", "construction.substrate", "nylon", "no known laminate"),
        ("load.case=1111", "load.case", "1111", "no known chip case"),
    ],
)
def test_a_faulty_override_is_named_as_one(path, override, key, got, remedy):
    faults = faults_of(path, override)

    assert [(fault.where, fault.key, fault.got) for fault in faults] == [("--set", key, got)]
    assert remedy in faults[0].remedy


@pytest.mark.parametrize(
    ("override", "remedy"),
    [
        ("passband.lower=2.3 GHz", "were the two swapped?"),
        ("passband.lower=1.2 GHz", "% wide"),
        ("passband.shape=butterworth", "Butterworth"),
        ("stopband.1.to=1.95 GHz", "overlaps the pass band"),
        ("load.kind=plate", "belongs to chip loads"),
        ("construction.substrate=ptfe-ceramic-3.00", "is not stocked"),
        ("construction.plating=50 um", "etches at most"),
        ("short.drill=0.65 mm", "above the diameter of the tool"),
        ("load.q=200", "as well as esr"),
    ],
)
def test_a_relation_that_an_override_breaks_names_the_override(path, override, remedy):
    faults = faults_of(path, override)

    assert {(fault.where, fault.key) for fault in faults} == {("--set", override.split("=")[0])}
    assert remedy in faults[0].remedy


def test_a_case_that_is_left_to_the_program_cannot_be_changed(tmp_path):
    file = tmp_path / "x.toml"
    file.write_text(starter_text("x"), encoding="utf-8")

    fault, *others = faults_of(file, "case.land_gap=0.4 mm")

    assert not others
    assert "--set load.case=0402" in fault.remedy


def test_faults_of_file_and_overrides_come_together(path):
    path.write_text(BASE.replace('impedance = "50 ohm"', "impedance = 50"), encoding="utf-8")

    faults = faults_of(path, "passband.ordr=3", "substrate.tan_delta=2", "short.count=0")

    assert {(fault.where, fault.key) for fault in faults} == {
        (str(path), "passband.impedance"),
        ("--set", "passband.ordr"),
        ("--set", "substrate.tan_delta"),
        ("--set", "short.count"),
    }
