"""The shipped library as data, and how entries are found."""

from __future__ import annotations

import itertools
import re
import shutil
import subprocess
import sys
import tomllib
from dataclasses import replace
from pathlib import Path

import pytest

from layoutgen.errors import InputError, InputErrors
from layoutgen.library import Library, default_library, read_chip_case, read_laminate, read_shop

REFERENCE = Path(__file__).parent / "reference"
CASES = tomllib.loads((REFERENCE / "chip-cases.toml").read_text(encoding="utf-8"))
LIBRARY = default_library()
SHIPPED = LIBRARY.directories[-1]
LAMINATES = LIBRARY.laminates()

LAMINATE_TEXT = """
name = "mine"
description = "For tests"
eps_r = 3.27
eps_r_process = 3.21
eps_r_tolerance = 0.07
tan_delta = 0.0031
reference_frequency = "8 GHz"
eps_r_temperature_coefficient = "-17 ppm/K"
expansion = "13 ppm/K"
source = "made up for tests"
[[thickness]]
nominal = "0.77 mm"
tolerance = "0.03 mm"
[[thickness]]
nominal = "0.33 mm"
tolerance = "0.02 mm"
[[copper]]
base = "17 um"
roughness = "1.1 um"
conductivity = "57 MS/m"
"""


def write(folder: Path, text: str, name: str = "mine") -> Path:
    path = folder / f"{name}.toml"
    path.write_text(text, encoding="utf-8")
    return path


def faults_of(path: Path) -> dict[str, InputError]:
    with pytest.raises(InputErrors) as caught:
        read_laminate(path)
    return {fault.key: fault for fault in caught.value.faults}


# the shipped files as data


def test_at_least_twelve_laminate_classes_are_shipped():
    assert len({laminate.name for laminate in LAMINATES}) >= 12


@pytest.mark.parametrize("laminate", LAMINATES, ids=lambda laminate: laminate.name)
class TestShippedLaminate:
    def test_is_named_by_class_and_design_permittivity(self, laminate):
        """Words of a class, then the permittivity: nothing that could be a product."""
        assert re.fullmatch(r"[a-z]+(-[a-z]+)*-\d+\.\d\d", laminate.name)
        assert float(laminate.name.rsplit("-", 1)[1]) == pytest.approx(laminate.eps_r, abs=1e-9)
        assert set(laminate.name.rsplit("-", 1)[0].split("-")) <= {
            "ptfe", "microfibre", "ceramic", "hydrocarbon", "thermoset", "epoxy", "glass", "alumina"
        }  # fmt: skip

    def test_is_physical(self, laminate):
        assert 2 < laminate.eps_r < 12, "between unfilled PTFE and filled ceramics"
        assert 0.0001 <= laminate.tan_delta <= 0.03
        assert 0 < laminate.eps_r_tolerance < 0.1 * laminate.eps_r
        assert laminate.eps_r >= laminate.eps_r_process, "the clamped test reads low through its air gaps"
        assert 1e9 <= laminate.reference_frequency <= 20e9
        assert abs(laminate.eps_r_tempco) < 1000e-6
        assert 5e-6 < laminate.expansion < 60e-6
        assert laminate.source.strip()

    def test_thinner_cores_have_the_smaller_tolerance_and_the_greater_share_of_it(self, laminate):
        stock = laminate.thicknesses
        assert len(stock) >= 4
        for thin, thick in itertools.pairwise(stock):
            assert thin.nominal < thick.nominal
            assert thin.tolerance <= thick.tolerance

    def test_foils_are_smoother_than_they_are_thick(self, laminate):
        """Rolled foil 0.3 to 0.5 um, electrodeposited 1.5 to 2.8 um rms: common practice."""
        assert [round(foil.base * 1e6, 3) for foil in laminate.coppers] == [18, 35]
        assert [foil.name for foil in laminate.coppers] == ["18 um", "35 um"]
        for foil in laminate.coppers:
            assert 0.3e-6 <= foil.roughness <= 0.5e-6 or 1.5e-6 <= foil.roughness <= 2.8e-6
            assert foil.conductivity == pytest.approx(58e6, rel=1e-12, abs=0)


def test_a_heavier_foil_is_never_smoother():
    for laminate in LAMINATES:
        light, heavy = laminate.coppers
        assert light.roughness <= heavy.roughness, laminate.name


@pytest.mark.parametrize("row", CASES["bodies"]["rows"], ids=lambda row: row[0])
def test_chip_bodies_are_those_of_the_standard(row):
    case = LIBRARY.chip_case(row[0])

    found = (
        case.body_length, case.body_length_tolerance, case.body_width, case.body_width_tolerance,
        case.terminal_length, case.terminal_length_tolerance,
    )  # fmt: skip

    assert found == pytest.approx([1e-3 * value for value in row[1:]], rel=1e-12, abs=0)


@pytest.mark.parametrize("row", CASES["lands"]["rows"], ids=lambda row: row[0])
def test_lands_are_those_of_the_standard_on_its_grid(row):
    """Width and gap to half a grid step; a length is half the difference of two rounded sizes."""
    name, outer, gap, width = row
    case = LIBRARY.chip_case(name)
    half_step = CASES["lands"]["grid"] / 2 * 1e-3 + 1e-12

    assert case.land_gap == pytest.approx(gap * 1e-3, abs=half_step)
    assert case.land_width == pytest.approx(width * 1e-3, abs=half_step)
    assert case.land_length == pytest.approx((outer - gap) / 2 * 1e-3, abs=half_step)
    for size in (case.land_gap, case.land_width, case.land_length):
        assert size / 0.05e-3 == pytest.approx(round(size / 0.05e-3), abs=1e-9)


def test_cases_grow_with_their_name_and_conduct_at_half_height():
    cases = LIBRARY.chip_cases()
    assert [case.name for case in cases] == ["0402", "0603", "0805"]
    for small, large in itertools.pairwise(cases):
        for size in ("body_length", "body_width", "body_height", "land_length", "land_width", "land_gap"):
            assert getattr(small, size) < getattr(large, size), size
    for case in cases:
        assert case.current_height == pytest.approx(case.body_height / 2, rel=1e-12, abs=0)


def test_the_advanced_shop_is_nowhere_worse_than_the_standard_one():
    standard, advanced = LIBRARY.shop("standard"), LIBRARY.shop("advanced")
    for size in ("min_drill", "annular_ring", "drill_to_conductor", "conductor_to_edge", "registration",
                 "mask_web", "mask_expansion", "outline_tolerance", "grid"):  # fmt: skip
        assert getattr(advanced, size) <= getattr(standard, size), size
    assert advanced.aspect_ratio >= standard.aspect_ratio
    for finished in (20e-6, 43e-6, 60e-6):
        assert advanced.min_gap(finished) < standard.min_gap(finished)
        assert advanced.min_line(finished) < standard.min_line(finished)


def test_gap_limits_step_up_with_the_finished_copper():
    """18 um of foil with 25 um of plating, and 35 um with the same; thicker is not etched."""
    shop = LIBRARY.shop("standard")
    first, second = shop.etching

    assert shop.min_gap(43e-6) == first.min_gap == pytest.approx(0.15e-3, rel=1e-12, abs=0)
    assert shop.min_gap(first.copper) == first.min_gap
    assert shop.min_gap(first.copper + 0.1e-6) == second.min_gap
    assert shop.min_gap(60e-6) == second.min_gap == pytest.approx(0.2e-3, rel=1e-12, abs=0)
    with pytest.raises(InputError) as caught:
        shop.min_gap(second.copper + 1e-6)
    assert caught.value.got == "66 um"


# finding


def test_an_unknown_name_lists_the_known_ones_and_the_nearest():
    with pytest.raises(InputError) as caught:
        LIBRARY.laminate("ptfe-ceramc-2.94")

    assert caught.value.got == "ptfe-ceramc-2.94"
    assert 'did you mean "ptfe-ceramic-2.94"?' in caught.value.remedy
    assert all(laminate.name in caught.value.remedy for laminate in LAMINATES)


@pytest.mark.parametrize(("look_up", "known"), [("chip_case", "0402"), ("shop", "advanced")])
def test_unknown_cases_and_shops_list_the_known_ones(look_up, known):
    with pytest.raises(InputError) as caught:
        getattr(LIBRARY, look_up)("nothing like it")

    assert known in caught.value.remedy


@pytest.mark.parametrize("name", ["../substrates/alumina-9.80", "parts/0402", "", ".", "alumina-9.80.toml"])
def test_a_name_is_no_path(name):
    with pytest.raises(InputError) as caught:
        LIBRARY.laminate(name)
    assert "no known laminate" in caught.value.remedy


def test_the_shipped_library_is_found_from_any_working_directory(tmp_path):
    code = "from layoutgen.library import default_library; print(len(default_library().laminates()))"

    found = subprocess.run(
        [sys.executable, "-c", code], cwd=tmp_path, capture_output=True, text=True, check=True, timeout=60
    )

    assert int(found.stdout) == len(LAMINATES)


def test_the_library_inside_an_installed_package_is_found(tmp_path):
    """A wheel carries the library as a folder of the package."""
    package = Path(sys.modules["layoutgen"].__file__).parent
    installed = tmp_path / "site" / "layoutgen"
    shutil.copytree(package, installed, ignore=shutil.ignore_patterns("__pycache__"))
    shutil.copytree(SHIPPED, installed / "substrates")
    code = "from layoutgen.library import default_library; print(default_library().shop('standard').path)"

    found = subprocess.run(
        [sys.executable, "-S", "-c", f"import sys; sys.path.insert(0, {str(tmp_path / 'site')!r}); {code}"],
        cwd=tmp_path, capture_output=True, text=True, check=True, timeout=60,
    )  # fmt: skip

    assert Path(found.stdout.strip()) == (installed / "substrates" / "shops" / "standard.toml").resolve()


def test_the_users_folder_is_searched_first(tmp_path):
    name = LAMINATES[0].name
    write(tmp_path, LAMINATE_TEXT.replace('"mine"', f'"{name}"'), name)
    write(tmp_path, LAMINATE_TEXT)

    library = default_library(tmp_path)

    assert library.laminate(name).eps_r == 3.27
    assert library.laminate("mine").path == tmp_path / "mine.toml"
    assert len(library.laminates()) == len(LAMINATES) + 1
    assert library.shop("standard") == LIBRARY.shop("standard")


def test_a_users_folder_that_is_none_is_refused(tmp_path):
    with pytest.raises(InputError) as caught:
        default_library(tmp_path / "absent")
    assert caught.value.where == "--substrates"
    assert caught.value.got == str(tmp_path / "absent")


# reading


def test_a_laminate_is_read_into_si_units(tmp_path):
    laminate = read_laminate(write(tmp_path, LAMINATE_TEXT))

    assert laminate.reference_frequency == 8e9
    assert laminate.eps_r_tempco == -17e-6
    assert laminate.expansion == 13e-6
    assert [(item.nominal, item.tolerance) for item in laminate.thicknesses] == [
        (0.33e-3, 0.02e-3),
        (0.77e-3, 0.03e-3),
    ]
    foil = laminate.coppers[0]
    assert (foil.name, foil.base, foil.roughness, foil.conductivity) == ("17 um", 17e-6, 1.1e-6, 57e6)


@pytest.mark.parametrize(
    ("line", "key", "remedy"),
    [
        ("eps_r = 0.9", "eps_r", "at least 1"),
        ("eps_r = nan", "eps_r", "finite"),
        ("eps_r = inf", "eps_r", "finite"),
        ("eps_r = true", "eps_r", "bare number"),
        ('eps_r = "3.27"', "eps_r", "bare number"),
        ("tan_delta = 1.0", "tan_delta", "below 1"),
        ("tan_delta = -0.001", "tan_delta", "at least 0"),
        ("eps_r_tolerance = -0.1", "eps_r_tolerance", "at least 0"),
        ("reference_frequency = 8e9", "reference_frequency", "needs a unit"),
        ('reference_frequency = "0 GHz"', "reference_frequency", "greater than 0 Hz"),
        ('reference_frequency = "8 mm"', "reference_frequency", 'unit "mm" is not a frequency'),
        ('expansion = "13"', "expansion", "needs a unit"),
        ('source = " "', "source", "must not be empty"),
        ('name = "other"', "name", '"mine"'),
    ],
)
def test_a_faulty_key_is_named_with_its_remedy(tmp_path, line, key, remedy):
    text = re.sub(rf"^{key} = .*$", line, LAMINATE_TEXT, flags=re.MULTILINE)
    path = write(tmp_path, text)

    faults = faults_of(path)

    assert list(faults) == [key]
    assert faults[key].where == str(path)
    assert remedy in faults[key].remedy


def test_every_fault_of_a_file_is_reported_at_once_in_its_order(tmp_path):
    text = (
        LAMINATE_TEXT.replace("eps_r = 3.27", "eps_r = 0.3\neps_rr = 3.27")
        .replace('tolerance = "0.02 mm"', 'tolerance = "0.33 mm"')
        .replace('base = "17 um"', "base = 17")
        .replace('expansion = "13 ppm/K"\n', "")
    )

    faults = faults_of(write(tmp_path, text))

    assert list(faults) == ["eps_r", "eps_rr", "thickness.2.tolerance", "copper.1.base", "expansion"]
    assert 'did you mean "eps_r"?' in faults["eps_rr"].remedy
    assert "smaller than the thickness" in faults["thickness.2.tolerance"].remedy
    assert faults["copper.1.base"].got == 17
    assert faults["expansion"].got is None
    assert faults["expansion"].remedy.startswith("is missing")


@pytest.mark.parametrize(
    ("cut", "key", "remedy"),
    [("[[copper]]", "copper", "[[copper]]"), ("[[thickness]]", "thickness", "[[thickness]]")],
)
def test_a_laminate_needs_something_in_stock(tmp_path, cut, key, remedy):
    head, *blocks = re.split(r"(?=^\[\[)", LAMINATE_TEXT, flags=re.MULTILINE)
    text = head + "".join(block for block in blocks if not block.startswith(cut))

    faults = faults_of(write(tmp_path, text))

    assert remedy in faults[key].remedy


def test_a_thickness_listed_twice_is_a_fault(tmp_path):
    faults = faults_of(write(tmp_path, LAMINATE_TEXT.replace('"0.33 mm"', '"0.77 mm"')))

    assert faults["thickness.2.nominal"].remedy == "is listed twice"


@pytest.mark.parametrize("double", ["[thickness]", 'thickness = "1 mm"'])
def test_a_stock_list_needs_double_brackets(tmp_path, double):
    head, *_ = re.split(r"(?=^\[\[)", LAMINATE_TEXT, flags=re.MULTILINE)

    faults = faults_of(write(tmp_path, head + double + '\n[[copper]]\nbase = "17 um"\n'))

    assert "[[thickness]]" in faults["thickness"].remedy


def test_a_list_of_the_library_gathers_the_faults_of_all_files(tmp_path):
    write(tmp_path, LAMINATE_TEXT.replace("3.27", "0.27"))
    write(tmp_path, LAMINATE_TEXT.replace("0.0031", "-1").replace('"mine"', '"two"'), "two")
    write(tmp_path, "name = ", "three")

    with pytest.raises(InputErrors) as caught:
        Library((tmp_path,)).laminates()

    assert [(Path(fault.where).stem, fault.key) for fault in caught.value.faults] == [
        ("mine", "eps_r"),
        ("three", ""),
        ("two", "tan_delta"),
    ]


@pytest.mark.parametrize(
    ("old", "new", "key"),
    [
        ('land_gap = "0.50 mm"', 'land_gap = "1.2 mm"', "land_gap"),
        ('terminal_length = "0.20 mm"', 'terminal_length = "0.6 mm"', "terminal_length"),
        ('voltage = "50 V"', 'current_height = "0.7 mm"', "current_height"),
        ('body_width = "0.50 mm"', 'body_width = "0 mm"', "body_width"),
    ],
)
def test_an_impossible_chip_case_is_refused(tmp_path, old, new, key):
    text = (SHIPPED / "parts" / "0402.toml").read_text(encoding="utf-8")
    assert old in text
    path = write(tmp_path, text.replace(old, new), "0402")

    with pytest.raises(InputErrors) as caught:
        read_chip_case(path)

    assert [fault.key for fault in caught.value.faults] == [key]


def test_a_current_height_and_the_absence_of_a_voltage_are_kept(tmp_path):
    text = (SHIPPED / "parts" / "0402.toml").read_text(encoding="utf-8")
    path = write(tmp_path, text.replace('voltage = "50 V"', 'current_height = "0.07 mm"'), "0402")

    case = read_chip_case(path)

    assert case.current_height == 0.07e-3
    assert case.voltage is None


def test_an_impossible_shop_is_refused(tmp_path):
    text = (SHIPPED / "shops" / "standard.toml").read_text(encoding="utf-8")
    path = write(tmp_path, text.replace("aspect_ratio = 8", "aspect_ratio = 0"), "standard")

    with pytest.raises(InputErrors) as caught:
        read_shop(path)

    assert caught.value.faults[0].remedy == "must be greater than 0 and at most 100"


def test_a_physical_thing_checks_itself_when_it_is_changed():
    with pytest.raises(InputError) as caught:
        replace(LAMINATES[0], eps_r=0.5)
    assert (caught.value.where, caught.value.key) == ("Laminate", "eps_r")
    with pytest.raises(InputError):
        replace(LAMINATES[0], tan_delta=float("nan"))
