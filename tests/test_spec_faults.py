"""Specifications that cannot be used: every fault named by file, key, value and remedy, all at once."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from layoutgen.errors import InputError, InputErrors
from layoutgen.spec import load_spec

GOOD = """
[part]
number = "P1"
[passband]
lower = "1.71 GHz"
upper = "1.79 GHz"
return_loss = "18 dB"
order = 4
impedance = "50 ohm"
[[stopband]]
from = "1.90 GHz"
to = "2.10 GHz"
rejection = "30 dB"
[construction]
kind = "microstrip"
substrate = "hydrocarbon-ceramic-3.55"
thickness = "0.813 mm"
[load]
case = "0402"
esr = "0.2 ohm"
[short]
drill = "0.3 mm"
[board]
shop = "standard"
"""


def faults_of(path: Path, text: str) -> list[InputError]:
    path.write_text(text, encoding="utf-8")
    with pytest.raises(InputErrors) as caught:
        load_spec(path)
    return list(caught.value.faults)


def change(old: str, new: str) -> str:
    assert GOOD.count(old) == 1
    return GOOD.replace(old, new)


LOWER, UPPER, ORDER = 'lower = "1.71 GHz"', 'upper = "1.79 GHz"', "order = 4"
STOP = 'from = "1.90 GHz"\nto = "2.10 GHz"'
ESR = 'esr = "0.2 ohm"'
SINGLE = [
    # units
    (LOWER, "lower = 1.71", "passband.lower", 1.71, "needs a unit"),
    (LOWER, 'lower = "1.71"', "passband.lower", "1.71", "needs a unit"),
    (LOWER, 'lower = "1.71 mm"', "passband.lower", "1.71 mm", 'unit "mm" is not a frequency'),
    (LOWER, 'lower = "1.71 ghz"', "passband.lower", "1.71 ghz", "use one of Hz, kHz, MHz, GHz"),
    (ORDER, 'order = "4"', "passband.order", "4", "a whole number, without quotes"),
    ('thickness = "0.813 mm"', "thickness = 0.813", "construction.thickness", 0.813, 'or "auto"'),
    # zero, negative, not finite
    (LOWER, 'lower = "0 GHz"', "passband.lower", "0 GHz", "at least 50 MHz"),
    (LOWER, 'lower = "-1.71 GHz"', "passband.lower", "-1.71 GHz", "at least 50 MHz"),
    (LOWER, 'lower = "nan GHz"', "passband.lower", "nan GHz", "not a finite number"),
    (LOWER, 'lower = "inf GHz"', "passband.lower", "inf GHz", "not a finite number"),
    (LOWER, 'lower = "1e999 GHz"', "passband.lower", "1e999 GHz", "finite"),
    (ESR, 'q = nan\nq_frequency = "1 GHz"', "load.q", None, "finite"),
    (ESR, 'q = inf\nq_frequency = "1 GHz"', "load.q", float("inf"), "finite"),
    (ESR, 'q = 0\nq_frequency = "1 GHz"', "load.q", 0, "at least 1"),
    (ESR, 'esr = "-0.2 ohm"', "load.esr", "-0.2 ohm", "at least 0 ohm"),
    (STOP, STOP.replace("1.90", "0"), "stopband.1.from", "0 GHz", "greater than 0 GHz"),
    ('rejection = "30 dB"', 'rejection = "-30 dB"', "stopband.1.rejection", "-30 dB", "at least 1 dB"),
    ('drill = "0.3 mm"', 'drill = "0 mm"', "short.drill", "0 mm", "at least 0.05 mm"),
    ('thickness = "0.813 mm"', 'thickness = "0 mm"', "construction.thickness", "0 mm", "greater than 0 mm"),
    # types
    (ORDER, "order = true", "passband.order", True, "whole number"),
    (ORDER, "order = 4.0", "passband.order", 4.0, "whole number"),
    (ORDER, "order = [4]", "passband.order", "[4]", "whole number"),
    (LOWER, "lower = true", "passband.lower", True, "must be a frequency with its unit"),
    (LOWER, "lower = {}", "passband.lower", "{}", "must be a frequency with its unit"),
    (LOWER, 'lower = ["1.71 GHz"]', "passband.lower", "['1.71 GHz']", "must be a frequency with its unit"),
    (LOWER, "lower = 1979-05-27", "passband.lower", None, "must be a frequency with its unit"),
    ('number = "P1"', "number = 1", "part.number", 1, "text in quotes"),
    ('number = "P1"', "revision = 2", "part.revision", 2, "text in quotes"),
    ('kind = "microstrip"', "kind = 1", "construction.kind", 1, "text in quotes"),
    ('case = "0402"', "case = 402", "load.case", 402, "text in quotes"),
    ('case = "0402"', "value = 1.2", "load.value", 1.2, "needs a unit"),
    (ORDER, "order = " + "9" * 40, "passband.order", "a number of more than 30 digits", "at most 9"),
    (ORDER, "order = 0x" + "f" * 9000, "passband.order", "a number of more than 30 digits", "at most 9"),
    (ESR, 'q_frequency = "1 GHz"\nq = 0x' + "f" * 9000, "load.q", "a number of more than 30 digits",
     "at most"),
    # limits
    (ORDER, "order = 1", "passband.order", 1, "at least 2 and at most 9"),
    (ORDER, "order = 10", "passband.order", 10, "at least 2 and at most 9"),
    ('"50 ohm"', '"9 ohm"', "passband.impedance", "9 ohm", "at least 10 ohm and at most 200 ohm"),
    ('"18 dB"', '"5.9 dB"', "passband.return_loss", "5.9 dB", "at least 6 dB"),
    ('return_loss = "18 dB"', 'ripple = "1.3 dB"', "passband.ripple", "1.3 dB", "at most 1.25 dB"),
    ('kind = "microstrip"', 'electrical_length = "86 deg"', "construction.electrical_length", "86 deg",
     "85 deg"),
    ('kind = "microstrip"', 'cover = "0 mm"', "construction.cover", "0 mm", "at least 0.2 mm"),
    ('case = "0402"', 'value = "2 nF"', "load.value", "2 nF", "at most 1000 pF"),
    ('drill = "0.3 mm"', "count = 0", "short.count", 0, "at least 1"),
    # relations
    (UPPER, 'upper = "1.61 GHz"', "passband.upper", "1.61 GHz", "were the two swapped?"),
    (UPPER, 'upper = "1.71 GHz"', "passband.upper", "1.71 GHz", "above passband.lower, 1.71 GHz"),
    (UPPER, 'upper = "1.715 GHz"', "passband.upper", "1.715 GHz", "0.5 to 30 %"),
    (LOWER, 'lower = "1.1 GHz"', "passband.upper", "1.79 GHz", "49.2 % wide"),
    (STOP, 'from = "2.1 GHz"\nto = "1.9 GHz"', "stopband.1.to", "1.9 GHz", "above stopband.1.from, 2.1 GHz"),
    (STOP, 'from = "1.75 GHz"\nto = "2.1 GHz"', "stopband.1.from", "1.75 GHz", "above 1.79 GHz"),
    (STOP, 'from = "1.79 GHz"\nto = "2.1 GHz"', "stopband.1.from", "1.79 GHz", "overlaps"),
    (STOP, 'from = "1.5 GHz"\nto = "1.75 GHz"', "stopband.1.to", "1.75 GHz", "below 1.71 GHz"),
    (STOP, 'from = "1.5 GHz"\nto = "2.1 GHz"', "stopband.1.to", "2.1 GHz", "overlaps the pass band"),
    (STOP, 'from = "1.72 GHz"\nto = "1.75 GHz"', "stopband.1.from", "1.72 GHz", "overlaps the pass band"),
    (ORDER, 'order = 4\nripple = "0.1 dB"', "passband.ripple", "0.1 dB", "as well as return_loss"),
    (ORDER, 'order = 4\nshape = "butterworth"', "passband.return_loss", "18 dB", "Butterworth"),
    (ESR, ESR + '\nq = 200\nq_frequency = "1 GHz"', "load.q", 200, "as well as esr"),
    (ESR, "q = 200", "load.q_frequency", None, "at which frequency"),
    (ESR, ESR + '\nq_frequency = "1 GHz"', "load.q_frequency", "1 GHz", "belongs to q"),
    (ESR, 'q_frequency = "1 GHz"', "load.q_frequency", "1 GHz", "belongs to q"),
    ('"0.813 mm"', '"0.8 mm"', "construction.thickness", "0.8 mm",
     "0.203, 0.305, 0.406, 0.508, 0.813, 1.524 mm"),
    ('kind = "microstrip"', 'copper = "70 um"', "construction.copper", "70 um", "comes in 18, 35 um"),
    ('drill = "0.3 mm"', 'drill = "0.6 mm"', "short.pitch", None, "above the diameter of the tool, 0.7 mm"),
    ('shop = "standard"', 'max_width = "8 mm"', "board.max_width", "8 mm", "above twice the margin, 8 mm"),
    ('shop = "standard"', 'grid = "0.5 um"', "board.grid", "0.5 um", "at least 1 um"),
    ('kind = "microstrip"', 'copper = "35 um"\nplating = "31 um"', "construction.copper", "35 um",
     "at most 65 um"),
    # names
    ('"hydrocarbon-ceramic-3.55"', '"hydrocarbon-ceramics-3.55"', "construction.substrate",
     "hydrocarbon-ceramics-3.55", 'did you mean "hydrocarbon-ceramic-3.55"?'),
    ('"hydrocarbon-ceramic-3.55"', '"zzz"', "construction.substrate", "zzz", "known: alumina-9.80"),
    ('"hydrocarbon-ceramic-3.55"', '"lib/x.toml"', "construction.substrate", "lib/x.toml", "does not exist"),
    ('"0402"', '"0604"', "load.case", "0604", 'did you mean "0603"?'),
    ('shop = "standard"', 'shop = "standart"', "board.shop", "standart", 'did you mean "standard"?'),
    ('"microstrip"', '"stripline"', "construction.kind", "stripline", 'in this version; write "microstrip"'),
    ('"microstrip"', '"bar"', "construction.kind", "bar", 'in this version; write "microstrip"'),
    ('"microstrip"', '"mikrostrip"', "construction.kind", "mikrostrip", 'did you mean "microstrip"?'),
    (ORDER, 'order = 4\nshape = "bessel"', "passband.shape", "bessel", '"chebyshev" or "butterworth"'),
    ('case = "0402"', 'series = "E96"', "load.series", "E96", '"E12", "E24" or "0.1 pF"'),
    ('case = "0402"', "series = []", "load.series", "[]", "at least one value"),
    ('case = "0402"', 'series = ["1 pF", 2]', "load.series", "['1 pF', 2]",
     "value 2 of the list: needs a unit"),
    ('case = "0402"', 'series = ["1 pF", "1.0 pF"]', "load.series", "['1 pF', '1.0 pF']",
     "the same value twice"),
    (LOWER, LOWER + '\nreturn_los = "1 dB"', "passband.return_los", "1 dB", 'did you mean "return_loss"?'),
    (LOWER, LOWER + "\nxyzzy = 1", "passband.xyzzy", 1, "known: lower, upper, shape"),
    ("[board]", "[boards]", "boards", "{'shop': 'standard'}", 'did you mean "board"?'),
    # part numbers
    ('"P1"', '""', "part.number", "", "must not be empty"),
    ('"P1"', '"a/b"', "part.number", "a/b", "1 to 64 of the characters"),
    ('"P1"', '"a b"', "part.number", "a b", "1 to 64 of the characters"),
    ('"P1"', '"Ä1"', "part.number", "Ä1", "1 to 64 of the characters"),
    ('"P1"', '"a\\n"', "part.number", "a\n", "1 to 64 of the characters"),
    ('"P1"', '"."', "part.number", ".", "not beginning with"),
    ('"P1"', '".."', "part.number", "..", "not beginning with"),
    ('"P1"', '"-x"', "part.number", "-x", "not beginning with"),
    ('"P1"', f'"{"x" * 65}"', "part.number", "x" * 65, "1 to 64 of the characters"),
    ('number = "P1"', 'title = "two\\nlines"', "part.title", "two\nlines", "on one line"),
    # tables
    ("[board]", "[[board]]", "board", "[{'shop': 'standard'}]", "[board] on a line of its own"),
    ("[[stopband]]", "[stopband]", "stopband", None, "[[stopband]], in double brackets"),
]  # fmt: skip


def test_the_specification_that_the_faults_are_put_into_is_good(tmp_path):
    path = tmp_path / "good.toml"
    path.write_text(GOOD, encoding="utf-8")

    assert load_spec(path).passband.order == 4


@pytest.mark.parametrize(
    ("old", "new", "key", "got", "remedy"), SINGLE, ids=[f"{row[2]}-{n}" for n, row in enumerate(SINGLE)]
)
def test_a_fault_is_named_with_file_key_value_and_remedy(tmp_path, old, new, key, got, remedy):
    path = tmp_path / "x.toml"

    faults = faults_of(path, change(old, new))

    assert [fault.key for fault in faults] == [key]
    assert faults[0].where == str(path)
    assert got is None or faults[0].got == got
    assert remedy in faults[0].remedy
    assert len(str(faults[0])) < 700


@pytest.mark.parametrize(
    ("line", "key"),
    [(LOWER, "passband.lower"), (UPPER, "passband.upper"),
     ('substrate = "hydrocarbon-ceramic-3.55"', "construction.substrate"),
     ('to = "2.10 GHz"', "stopband.1.to"), ('rejection = "30 dB"', "stopband.1.rejection")],
)  # fmt: skip
def test_a_missing_mandatory_key_is_named(tmp_path, line, key):
    fault, *others = faults_of(tmp_path / "x.toml", change(line, ""))

    assert not others
    assert (fault.key, fault.got) == (key, None)
    assert fault.remedy.startswith("is missing; write for example")


def test_missing_tables_are_missing_keys(tmp_path):
    faults = faults_of(tmp_path / "x.toml", '[part]\nnumber = "P"')

    assert [fault.key for fault in faults] == [
        "passband.lower", "passband.upper", "construction.substrate", "passband.order"
    ]  # fmt: skip


def test_an_automatic_order_needs_a_stop_band(tmp_path):
    head, tail = GOOD.split("[[stopband]]")
    text = head.replace("order = 4\n", "") + "[construction]" + tail.split("[construction]")[1]

    fault, *others = faults_of(tmp_path / "x.toml", text)

    assert not others
    assert (fault.key, fault.got) == ("passband.order", None)
    assert "2 to 9" in fault.remedy


@pytest.mark.parametrize(
    "line", ['case = "0402"', 'series = "E12"', 'value = "auto"', 'tolerance = "0.1 pF"', "q = 200",
             'q_frequency = "1 GHz"', 'inductance = "0 nH"']
)  # fmt: skip
def test_keys_of_a_chip_do_not_belong_to_a_plate(tmp_path, line):
    text = change('case = "0402"\nesr = "0.2 ohm"', f'kind = "plate"\n{line}')

    fault, *others = faults_of(tmp_path / "x.toml", text)

    assert not others
    assert fault.key == f"load.{line.split()[0]}"
    assert "belongs to chip loads" in fault.remedy


def test_every_fault_of_all_tables_is_reported_at_once_in_the_order_of_the_file(tmp_path):
    path = tmp_path / "x.toml"
    text = (
        GOOD.replace('"P1"', '"a/b"')
        .replace('upper = "1.79 GHz"', 'upper = "1.61 GHz"')
        .replace('return_loss = "18 dB"', "return_loss = 18")
        .replace("order = 4", "ordr = 4\norder = true")
        .replace('to = "2.10 GHz"', 'to = "1.8 GHz"')
        .replace('"hydrocarbon-ceramic-3.55"', '"unobtainium"')
        .replace('thickness = "0.813 mm"', 'thickness = "-1 mm"')
        .replace('"0402"', '"9999"')
        .replace('esr = "0.2 ohm"', "q = 0")
        .replace("[short]", "[shorts]")
        .replace('"standard"', '"nobody"')
    )

    faults = faults_of(path, text)

    assert [fault.key for fault in faults] == [
        "part.number", "passband.upper", "passband.return_loss", "passband.ordr", "passband.order",
        "stopband.1.to", "construction.substrate", "construction.thickness", "load.case", "load.q", "shorts",
        "board.shop", "load.q_frequency",
    ]  # fmt: skip
    assert {fault.where for fault in faults} == {str(path)}


def test_faults_of_a_laminate_file_name_that_file(tmp_path):
    laminate = tmp_path / "own.toml"
    laminate.write_text('name = "own"\neps_r = 0.5\n', encoding="utf-8")

    faults = faults_of(
        tmp_path / "x.toml",
        change('"hydrocarbon-ceramic-3.55"', '"own.toml"').replace("order = 4", "order = 0"),
    )

    found = {(Path(fault.where).name, fault.key) for fault in faults}
    assert {("own.toml", "eps_r"), ("own.toml", "tan_delta"), ("x.toml", "passband.order")} <= found
    permittivity = next(fault for fault in faults if fault.key == "eps_r")
    assert permittivity.remedy == "must be at least 1 and at most 1000"


def test_a_file_name_that_is_no_part_number_asks_for_one(tmp_path):
    fault, *others = faults_of(tmp_path / "my filter.toml", change('number = "P1"', ""))

    assert not others
    assert fault.key == "part.number"
    assert '"my filter"' in fault.remedy


# files


def unreadable(path: Path) -> InputError:
    with pytest.raises(InputError) as caught:
        load_spec(path)
    assert caught.value.where == str(path)
    return caught.value


def test_an_absent_file(tmp_path):
    assert "does not exist" in unreadable(tmp_path / "absent.toml").remedy


def test_an_absent_folder(tmp_path):
    assert "does not exist" in unreadable(tmp_path / "absent" / "x.toml").remedy


def test_a_directory(tmp_path):
    assert "is a directory" in unreadable(tmp_path).remedy


def test_a_file_used_as_a_folder(tmp_path):
    (tmp_path / "x").write_text("", encoding="utf-8")
    assert "cannot be read" in unreadable(tmp_path / "x" / "y.toml").remedy


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="named pipes are a POSIX thing")
def test_a_named_pipe_is_not_waited_for(tmp_path):
    os.mkfifo(tmp_path / "pipe.toml")
    assert "not a regular file" in unreadable(tmp_path / "pipe.toml").remedy


def test_a_name_that_is_too_long(tmp_path):
    assert "cannot be read" in unreadable(tmp_path / ("x" * 5000)).remedy


def test_a_name_with_a_null_character():
    with pytest.raises(InputError) as caught:
        load_spec("a\0b.toml")
    assert "not a possible file name" in caught.value.remedy


def test_a_file_without_permission(tmp_path, monkeypatch):
    """The refusal is played, because an administrator may read anything."""
    path = tmp_path / "x.toml"
    path.write_text(GOOD, encoding="utf-8")

    def refuse(self: Path) -> bytes:
        raise PermissionError(13, "Permission denied", str(self))

    monkeypatch.setattr(Path, "read_bytes", refuse)

    assert unreadable(path).remedy == "cannot be read: Permission denied"


@pytest.mark.parametrize("content", [b"", b"\n  \n", b"# only a comment\n", b"\xef\xbb\xbf"])
def test_an_empty_file(tmp_path, content):
    (tmp_path / "x.toml").write_bytes(content)
    assert "is empty" in unreadable(tmp_path / "x.toml").remedy


@pytest.mark.parametrize(
    "content", [b'[part]\ntitle = "\xfcber"\n', b"\xff\xfe[\0p\0", bytes(range(128, 256))]
)
def test_a_file_that_is_not_utf_8(tmp_path, content):
    (tmp_path / "x.toml").write_bytes(content)
    assert "is not UTF-8 text (line " in unreadable(tmp_path / "x.toml").remedy


@pytest.mark.parametrize(
    ("text", "says"),
    [("[part]\nnumber == 3\n", "line 2"), ("[part\n", "line 1"), ('{"json": 1}', "line 1"),
     ("a = 1\na = 2\n", "line 2"),
     ("\0", "line 1"), ("a = " + "9" * 5000, ""), ("a = " + "[" * 5000, "")],
)  # fmt: skip
def test_a_file_that_is_not_toml_says_where(tmp_path, text, says):
    (tmp_path / "x.toml").write_text(text, encoding="utf-8")
    remedy = unreadable(tmp_path / "x.toml").remedy
    assert "TOML" in remedy
    assert says in remedy


def test_a_message_reads_as_file_key_value_remedy(tmp_path):
    path = tmp_path / "x.toml"
    fault = faults_of(path, change('rejection = "30 dB"', "rejection = 30"))[0]

    assert str(fault) == f'{path}: stopband.1.rejection = 30: needs a unit; write for example "20 dB"'


def test_reading_loads_no_numerics():
    """The commands that only read stay instant."""
    code = "import layoutgen.spec, sys; print(sorted({'numpy', 'scipy', 'shapely'} & set(sys.modules)))"
    found = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, timeout=60
    )
    assert found.stdout.strip() == "[]"
