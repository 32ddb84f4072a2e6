"""Specifications that can be used: values, defaults, names and paths, random ones."""

from __future__ import annotations

import math
import tomllib
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.errors import InputErrors, PhysicalRefusal
from layoutgen.library import default_library
from layoutgen.spec import SPEC, load_spec, starter_text

SERIES = tomllib.loads(
    (Path(__file__).parent / "reference" / "preferred-numbers.toml").read_text(encoding="utf-8")
)
LEAST = """
[passband]
lower = "2.11 GHz"
upper = "2.17 GHz"
order = 4
[construction]
substrate = "ptfe-ceramic-2.94"
"""
WHOLE = """
[part]
number = "DL.7_b-2"
title = "Übergangsfilter"
revision = "C2"
[passband]
lower = "2110 MHz"
upper = "2.17 GHz"
shape = "chebyshev"
ripple = "0.05 dB"
order = "auto"
insertion_loss = "3.7 dB"
impedance = "75 ohm"
[[stopband]]
from = "2.3 GHz"
to = "3.1 GHz"
rejection = "33 dB"
[[stopband]]
from = "1.7 GHz"
to = "1.95 GHz"
rejection = "21 dB"
[margin]
return_loss = "1.5 dB"
bandwidth = "7 MHz"
[construction]
kind = "microstrip"
substrate = "ptfe-ceramic-2.94"
thickness = "0.762 mm"
copper = "35 um"
plating = "22 um"
cover = "9 mm"
line_width = "1.31 mm"
electrical_length = "47 deg"
[load]
kind = "chip"
case = "0603"
series = ["2.2 pF", "1.1 pF"]
value = "1.37 pF"
tolerance = "0.02 pF"
q = 310
q_frequency = "1.1 GHz"
inductance = "0.03 nH"
[short]
drill = "0.35 mm"
plating = "0.08 mm"
count = 2
pitch = "0.8 mm"
[board]
shop = "advanced"
grid = "5 um"
margin = "3.1 mm"
clearance = "6.3 mm"
max_width = "61 mm"
max_height = "43 mm"
connector = "none"
"""


def load(folder: Path, text: str, name: str = "a-part.toml", **options):
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return load_spec(path, **options)


def test_every_key_is_read_into_si_units(tmp_path):
    spec = load(tmp_path, WHOLE)

    assert (spec.part.number, spec.part.title, spec.part.revision) == ("DL.7_b-2", "Übergangsfilter", "C2")
    band = spec.passband
    assert (band.lower, band.upper, band.shape, band.order) == (2.11e9, 2.17e9, "chebyshev", None)
    assert (band.insertion_loss, band.impedance) == (3.7, 75)
    stops = [(stop.lower, stop.upper, stop.rejection) for stop in spec.stopbands]
    assert stops == [(2.3e9, 3.1e9, 33), (1.7e9, 1.95e9, 21)]
    made = spec.construction
    assert (made.kind, made.laminate.name) == ("microstrip", "ptfe-ceramic-2.94")
    assert made.thickness in made.laminate.thicknesses
    assert (made.thickness.nominal, made.copper.base, made.plating) == (0.762e-3, 35e-6, 22e-6)
    assert made.conductor == pytest.approx(57e-6, rel=1e-12, abs=0)
    assert (made.cover, made.line_width) == (9e-3, 1.31e-3)
    assert made.electrical_length == pytest.approx(math.radians(47), rel=1e-12, abs=0)
    chip = spec.load
    assert (chip.kind, chip.case.name, chip.series, chip.series_name) == (
        "chip",
        "0603",
        (1.1e-12, 2.2e-12),
        "list",
    )
    assert (chip.value, chip.tolerance, chip.inductance) == (1.37e-12, 0.02e-12, 0.03e-9)
    assert (chip.esr, chip.q, chip.q_frequency) == (None, 310, 1.1e9)
    short = spec.short
    assert (short.drill, short.plating, short.count, short.pitch) == (0.35e-3, 0.08e-3, 2, 0.8e-3)
    assert short.tool == pytest.approx(0.43e-3, rel=1e-12, abs=0)
    board = spec.board
    assert (board.shop.name, board.grid, board.margin, board.clearance) == ("advanced", 5e-6, 3.1e-3, 6.3e-3)
    assert (board.max_width, board.max_height, board.connector) == (61e-3, 43e-3, "none")


def test_the_whole_specification_names_every_key_and_leaves_nothing_to_defaults(tmp_path):
    spec = load(tmp_path, WHOLE)

    every = {name for name, _ in SPEC.dotted()}
    assert every - set(spec.written) == {"load.esr", "passband.return_loss"}, "the two that exclude others"
    assert spec.defaults == ()


def test_only_the_mandatory_keys_are_needed_and_each_default_is_listed(tmp_path):
    spec = load(tmp_path, LEAST)

    listed = dict(line.split(" = ", 1) for line in spec.defaults)
    given = {"passband.lower", "passband.upper", "passband.order", "construction.substrate"}
    without = {"passband.ripple", "load.q", "load.q_frequency"}
    assert set(listed) == {name for name, _ in SPEC.dotted() if "stopband" not in name} - given - without
    assert listed["part.number"] == spec.part.number == "a-part"
    assert (listed["passband.return_loss"], spec.passband.return_loss) == ("20 dB", 20)
    assert (listed["load.esr"], spec.load.esr) == ("0.15 ohm", 0.15)
    assert (listed["construction.thickness"], spec.construction.thickness) == ("auto", None)
    assert (listed["construction.plating"], spec.construction.plating) == ("25 um", 25e-6)
    assert (listed["short.plating"], spec.short.plating) == ("0.10 mm", 0.1e-3)
    assert (spec.passband.shape, spec.passband.impedance, spec.stopbands) == ("chebyshev", 50, ())
    assert (spec.load.case, spec.load.series_name, spec.load.value) == (None, "E24", None)
    assert (spec.board.shop.name, spec.board.grid, spec.board.margin) == ("standard", 1e-6, 4e-3)
    assert (spec.construction.cover, spec.board.clearance, spec.board.max_width) == (None, None, None)


def test_a_listed_default_written_out_gives_the_same_specification(tmp_path):
    """What is printed as the default is what holds: each line is used as an override."""
    plain = load(tmp_path, LEAST)

    spelt = load(tmp_path, LEAST, overrides=[line.replace(" = ", "=") for line in plain.defaults])

    assert replace(spelt, overrides=(), defaults=plain.defaults, written={}, changes={}) == replace(
        plain, written={}, changes={}
    )
    assert spelt.defaults == ()


def test_the_stop_band_makes_the_order_automatic(tmp_path):
    text = (
        LEAST.replace("order = 4\n", "")
        + '[[stopband]]\nfrom = "2.3 GHz"\nto = "2.4 GHz"\nrejection = "20 dB"'
    )

    spec = load(tmp_path, text)

    assert spec.passband.order is None
    assert "passband.order = auto" in spec.defaults


def test_band_centre_and_width(tmp_path):
    band = load(tmp_path, LEAST).passband

    assert band.centre**2 == pytest.approx(2.11e9 * 2.17e9, rel=1e-12, abs=0)
    assert band.bandwidth == pytest.approx(60e6, rel=1e-9, abs=0)
    assert band.fractional_bandwidth == pytest.approx(60e6 / math.sqrt(2.11e9 * 2.17e9), rel=1e-9, abs=0)


@pytest.mark.parametrize("ripple", [0.0005, 0.05, 0.1, 1.2])
def test_ripple_is_the_return_loss_of_a_lossless_network(tmp_path, ripple):
    """Energy: what is reflected and what passes add up to one."""
    spec = load(tmp_path, LEAST.replace("order = 4", f'order = 4\nripple = "{ripple} dB"'))

    reflected = 10 ** (-spec.passband.return_loss / 10)

    assert reflected + 10 ** (-ripple / 10) == pytest.approx(1, rel=1e-12, abs=0)


def test_butterworth_has_no_ripple(tmp_path):
    spec = load(tmp_path, LEAST.replace("order = 4", 'order = 4\nshape = "butterworth"'))

    assert spec.passband.return_loss is None
    assert not any(line.startswith("passband.return_loss") for line in spec.defaults)


def test_a_q_is_carried_at_constant_resistance(tmp_path):
    """At the frequency it was taken, reactance over resistance is the q again, for any capacitance."""
    load_with_q = load(tmp_path, WHOLE).load
    for capacitance in (0.47e-12, 3.9e-12):
        reactance = 1 / (2 * math.pi * 1.1e9 * capacitance)
        assert reactance / load_with_q.resistance(capacitance) == pytest.approx(310, rel=1e-12, abs=0)


def test_an_esr_holds_for_every_capacitance(tmp_path):
    chip = load(tmp_path, LEAST + '[load]\nesr = "0.23 ohm"').load

    assert chip.resistance(0.5e-12) == chip.resistance(7e-12) == 0.23


def test_a_plate_has_nothing_of_a_chip(tmp_path):
    spec = load(tmp_path, LEAST + '[load]\nkind = "plate"')

    assert (spec.load.kind, spec.load.series, spec.load.value, spec.load.esr) == ("plate", (), None, None)
    assert spec.load.resistance(1e-12) == 0
    assert [line for line in spec.defaults if line.startswith("load.")] == []


@pytest.mark.parametrize("name", ["E12", "E24"])
def test_series_are_those_of_the_standard(tmp_path, name):
    chip = load(tmp_path, LEAST + f'[load]\nseries = "{name}"').load

    numbers = SERIES["series"][name]
    expected = [number * 10.0**exponent for exponent in (-14, -13, -12) for number in numbers] + [100e-12]
    assert chip.series_name == name
    assert chip.series == pytest.approx(expected, rel=1e-12, abs=0)


def test_tenth_picofarad_steps_end_at_ten(tmp_path):
    chip = load(tmp_path, LEAST + '[load]\nseries = "0.1 pF"').load

    fine = [value for value in chip.series if value < 10.05e-12]
    assert fine == pytest.approx([n * 0.1e-12 for n in range(1, 101)], rel=1e-12, abs=0)
    assert chip.series[100] == pytest.approx(11e-12, rel=1e-12, abs=0)
    assert chip.series[-1] == pytest.approx(100e-12, rel=1e-12, abs=0)


def test_a_stocked_thickness_is_meant_within_a_micrometre(tmp_path):
    spec = load(tmp_path, LEAST + 'thickness = "0.7629 mm"\n')
    assert spec.construction.thickness.nominal == 0.762e-3

    with pytest.raises(InputErrors) as caught:
        load(tmp_path, LEAST + 'thickness = "0.7632 mm"\n')
    assert "0.127, 0.254, 0.508, 0.762, 1.524 mm" in caught.value.faults[0].remedy


def own_laminate(folder: Path, name: str = "own-1") -> Path:
    shipped = default_library().laminate("alumina-9.80").path
    text = shipped.read_text(encoding="utf-8").replace('name = "alumina-9.80"', f'name = "{name}"')
    folder.mkdir(exist_ok=True)
    path = folder / f"{name}.toml"
    path.write_text(text.replace("eps_r = 9.80", "eps_r = 9.73"), encoding="utf-8")
    return path


@pytest.mark.parametrize("where", ["beside the specification", "working directory", "absolute"])
def test_a_substrate_may_be_a_file(tmp_path, monkeypatch, where):
    work = tmp_path / "work"
    work.mkdir()
    monkeypatch.chdir(work)
    path = own_laminate((work if where == "working directory" else tmp_path) / "lib")
    written = str(path) if where == "absolute" else "lib/own-1.toml"

    spec = load(tmp_path, LEAST.replace("ptfe-ceramic-2.94", written))

    assert spec.construction.laminate.eps_r == 9.73
    assert spec.construction.laminate.path.resolve() == path


def test_the_users_library_is_used(tmp_path):
    own_laminate(tmp_path / "lib")

    spec = load(tmp_path, LEAST.replace("ptfe-ceramic-2.94", "own-1"), substrates=tmp_path / "lib")

    assert spec.construction.laminate.eps_r == 9.73
    assert spec.library.laminate("own-1") == spec.construction.laminate


def test_a_byte_order_mark_is_no_fault(tmp_path):
    path = tmp_path / "marked.toml"
    path.write_bytes(b"\xef\xbb\xbf" + LEAST.strip().encode())

    assert load_spec(path).part.number == "marked"


def test_values_are_remembered_as_written(tmp_path):
    spec = load(tmp_path, WHOLE)

    assert spec.text("passband.lower") == "2110 MHz"
    assert spec.text("stopband.2.to") == "1.95 GHz"
    assert spec.text("short.count") == "2"
    assert spec.text("load.series") == "2.2 pF, 1.1 pF"
    assert spec.text("load.esr") is None


def test_a_refusal_names_file_key_and_value(tmp_path):
    spec = load(tmp_path, WHOLE, overrides=["load.value=1.6 pF"])

    refusal = spec.refusal("construction.electrical_length", "is too long; at most 40 deg")
    changed = spec.refusal("load.value", "is too large")
    figure = spec.refusal("passband.upper", "is too wide", got="9 %")

    assert isinstance(refusal, PhysicalRefusal)
    assert (refusal.where, refusal.got) == (str(spec.path), "47 deg")
    assert str(refusal).endswith('construction.electrical_length = "47 deg": is too long; at most 40 deg')
    assert (changed.where, changed.got) == ("--set", "1.6 pF")
    assert figure.got == "9 %"


# the starter


def test_the_starter_loads_as_it_stands(tmp_path):
    spec = load(tmp_path, starter_text("my-filter.2"))

    assert spec.part.number == "my-filter.2"
    assert 0.05 < spec.passband.fractional_bandwidth < 0.09
    below = [stop for stop in spec.stopbands if stop.upper < spec.passband.lower]
    above = [stop for stop in spec.stopbands if stop.lower > spec.passband.upper]
    assert below
    assert above
    assert spec.load.kind == "chip"
    assert spec.construction.thickness is not None


def test_the_starter_shows_nearly_every_key():
    text = starter_text("x")
    unnamed = {name for name, _ in SPEC.dotted() if f"{name.rsplit('.', 1)[1]} = " not in text}

    assert unnamed == {"board.clearance"}


def test_the_starter_without_its_optional_lines_means_the_same_band(tmp_path):
    """Its first comment says that all but three lines may go."""
    kept, table = [], ""
    for line in starter_text("x").splitlines():
        if line.startswith("["):
            table = line.split("]")[0]
        if line.startswith(("[passband", "[[stop", "[construction", "lower", "upper", "substrate")) or (
            table == "[[stopband" and not line.startswith("#")
        ):
            kept.append(line)

    spec = load(tmp_path, "\n".join(kept))

    assert spec.passband == load(tmp_path, starter_text("x")).passband


# random specifications


def quantities(low: float, high: float, unit: str, digits: int = 4) -> st.SearchStrategy[str]:
    return st.floats(low, high).map(lambda value: f"{value:.{digits}f} {unit}")


@st.composite
def specifications(draw) -> dict[str, object]:
    """Valid specifications as nested tables of texts and numbers."""
    centre = draw(st.floats(0.1, 13))  # the stop band above stays below the highest frequency allowed
    fraction = draw(st.floats(0.007, 0.28))
    lower, upper = (f"{centre * (1 + side * fraction / 2):.6f} GHz" for side in (-1, 1))
    laminate = draw(st.sampled_from(default_library().laminates()))
    band: dict[str, object] = {"lower": lower, "upper": upper, "order": draw(st.integers(2, 9))}
    if draw(st.booleans()):
        band["shape"] = "butterworth"
    else:
        band["return_loss"] = draw(quantities(6, 40, "dB"))
    thickness = draw(st.sampled_from(laminate.thicknesses)).nominal
    construction = {
        "substrate": laminate.name,
        "thickness": draw(st.sampled_from(["auto", f"{thickness * 1e3:.3f} mm"])),
        "line_width": draw(st.one_of(st.just("auto"), quantities(0.2, 4, "mm"))),
        "electrical_length": draw(st.one_of(st.just("auto"), quantities(20, 85, "deg"))),
    }
    above = draw(st.floats(1.01, 1.2))
    stop = {
        "from": f"{centre * (1 + fraction / 2) * above:.6f} GHz",
        "to": f"{centre * (1 + fraction / 2) * above * 1.05:.6f} GHz",
        "rejection": draw(quantities(1, 120, "dB")),
    }
    tolerance = draw(quantities(0, 0.5, "pF"))
    return {
        "passband": band,
        "stopband": stop,
        "construction": construction,
        "load": {"tolerance": tolerance},
    }


def as_toml(tables: dict[str, dict[str, object]]) -> str:
    lines = []
    for name, table in tables.items():
        lines.append("[[stopband]]" if name == "stopband" else f"[{name}]")
        lines += [f"{key} = {value if isinstance(value, int) else chr(34) + str(value) + chr(34)}"
                  for key, value in table.items()]  # fmt: skip
    return "\n".join(lines)


@settings(max_examples=60, deadline=None)
@given(tables=specifications())
def test_any_valid_specification_loads_with_the_values_that_were_written(tmp_path_factory, tables):
    folder = tmp_path_factory.mktemp("random")

    spec = load(folder, as_toml(tables))

    band, construction = tables["passband"], tables["construction"]
    assert spec.passband.lower == float(band["lower"].split()[0] + "e9")
    assert spec.passband.upper == float(band["upper"].split()[0] + "e9")
    assert spec.passband.order == band["order"]
    assert spec.passband.return_loss == (float(band["return_loss"][:-3]) if "return_loss" in band else None)
    assert spec.stopbands[0].lower == float(tables["stopband"]["from"].split()[0] + "e9")
    assert spec.load.tolerance == float(tables["load"]["tolerance"].split()[0] + "e-12")
    for key, value in (
        ("line_width", spec.construction.line_width),
        ("thickness", spec.construction.thickness),
    ):
        length = getattr(value, "nominal", value)
        assert length == (
            None if construction[key] == "auto" else float(construction[key].split()[0] + "e-3")
        )
    for table, keys in tables.items():
        at = "stopband.1" if table == "stopband" else table
        assert all(spec.text(f"{at}.{key}") == str(value) for key, value in keys.items())


@settings(max_examples=60, deadline=None)
@given(
    text=st.text(max_size=60), key=st.sampled_from([name for name, _ in SPEC.dotted() if "stop" not in name])
)
def test_any_text_as_a_value_is_used_or_refused_by_its_key(tmp_path_factory, text, key):
    """Whatever is written, the answer is a specification or a fault, never another exception."""
    folder = tmp_path_factory.mktemp("random")
    path = folder / "x.toml"
    path.write_text(LEAST, encoding="utf-8")

    faults = ()
    try:
        load_spec(path, overrides=[f"{key}={text}"])
    except InputErrors as errors:
        faults = errors.faults

    assert not faults or any(fault.where == "--set" for fault in faults)
