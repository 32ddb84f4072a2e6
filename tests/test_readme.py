"""What README.md says is so: its commands and code run, its tables are those of the program."""

from __future__ import annotations

import re
import shlex
import subprocess
import sys
from pathlib import Path

import pytest

import layoutgen.cli as cli
from layoutgen import load_spec
from layoutgen.library import Key
from layoutgen.package import FILES
from layoutgen.spec import SPEC

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEMO = Path("outputs") / "harbour-telemetry.toml"
KEPT = ROOT / "outputs" / "HT-1710"

MINIMAL = """
[passband]
lower = "1.64 GHz"
upper = "1.78 GHz"
[[stopband]]
from = "1.0 GHz"
to = "1.3 GHz"
rejection = "20 dB"
[construction]
substrate = "alumina-9.80"
"""


def blocks(language: str) -> list[str]:
    """Content of every fenced block of a language, in order."""
    return re.findall(rf"^```{language}\n(.*?)^```$", README, flags=re.M | re.S)


def table_rows(text: str) -> list[list[str]]:
    """Cells of the rows of all tables of a text, heads left out."""
    lines = [line for line in text.splitlines() if line.startswith("|")]
    heads = {i for i, line in enumerate(lines) if set(line) <= set("|-: ")}
    body = [line for i, line in enumerate(lines) if i not in heads and i + 1 not in heads]
    return [[cell.strip() for cell in line.strip("|").split("|")] for line in body]


def sections(level: str) -> dict[str, str]:
    """Text below each heading of a level, up to the next heading of any level."""
    parts = re.split(r"^(#+ .*)$", README, flags=re.M)
    return {
        head.removeprefix(f"{level} ").strip("`"): body
        for head, body in zip(parts[1::2], parts[2::2], strict=True)
        if head.startswith(f"{level} ")
    }


# -- the two commands


def test_the_first_block_holds_two_commands_for_a_fresh_clone():
    first = re.search(r"^```(\w*)\n(.*?)\n```$", README, flags=re.M | re.S)
    assert first is not None
    assert first[1] == "sh"

    build, test = first[2].splitlines()

    environment = "python3 -m venv .venv && .venv/bin/pip install"
    assert build == f"{environment} . && .venv/bin/layoutgen build {DEMO}"
    assert test == f"{environment} -e '.[dev]' && .venv/bin/pytest"
    assert (ROOT / DEMO).is_file()


def test_continuous_integration_takes_its_command_from_here():
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")

    assert "README.md" in script
    assert "pytest" not in script
    assert "[dev]" not in script


# -- the walk


def test_the_commands_of_the_walk_end_as_it_says(tmp_path, monkeypatch, capsys):
    """One after another from a folder that holds nothing but the demo and the laminate the text writes."""
    monkeypatch.chdir(tmp_path)
    DEMO.parent.mkdir()
    DEMO.write_bytes((ROOT / DEMO).read_bytes())
    for text in blocks("toml"):
        path = Path(text.splitlines()[0].removeprefix("# "))
        path.parent.mkdir(exist_ok=True)
        path.write_text(text, encoding="utf-8")
    lines = [line for block in blocks("sh")[1:] for line in block.splitlines()]
    assert len(lines) > 8

    for line in lines:
        command, _, comment = line.partition("  # ")
        name, *words = shlex.split(command)
        assert name == "layoutgen"
        wanted = int(comment.removeprefix("exit code ") or 0)

        assert cli.main(words) == wanted, line

    said = capsys.readouterr()
    assert said.err == ""
    assert "copper loss most of all" in said.out
    assert "bench-lot-7" in said.out


def test_quoted_output_stands_in_the_kept_example():
    """A change detector: rebuild the example, and quote it again, when a figure has moved for a reason."""
    summary = (KEPT / "HT-1710-summary.txt").read_text(encoding="utf-8").splitlines()

    quoted = [line for block in blocks("text") for line in block.splitlines() if line]

    assert len(quoted) > 3
    assert [line for line in quoted if line not in summary] == []


def test_links_lead_to_files():
    targets = re.findall(r"\]\(([^)]+)\)", README)

    assert {"outputs/HT-1710/HT-1710-layout.svg", "outputs/HT-1710/HT-1710-response.svg"} <= set(targets)
    assert [target for target in targets if not (ROOT / target).exists()] == []


# -- the tutorial


def test_the_tutorial_prints_what_it_says_it_prints(tmp_path):
    """Figures are rounded to what holds on any machine."""
    code = "\n".join(blocks("python"))
    (tmp_path / "tutorial.py").write_text(code, encoding="utf-8")
    expected = re.findall(r"(?:^|  )# (.*)$", code, flags=re.M)

    done = subprocess.run(
        [sys.executable, "-W", "error", "tutorial.py"],
        cwd=tmp_path,
        capture_output=True,
        text=True,
        check=False,
        timeout=300,
    )

    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout.splitlines() == expected
    assert len(expected) > 8
    assert len(list((tmp_path / "weir-gauge").iterdir())) == len(FILES)


# -- the tables


def key_rows() -> dict[str, list[str]]:
    """Cells of each row of the key tables, by dotted key; members of a list by 1."""
    found: dict[str, list[str]] = {}
    for head, text in sections("###").items():
        if table := re.fullmatch(r"\[(\[?)(\w+)\]+", head):
            at = f"{table[2]}.1." if table[1] else f"{table[2]}."
            found |= {at + row[0].strip("`"): row for row in table_rows(text)}
    return found


def test_every_key_of_a_specification_has_a_row_and_every_row_a_key():
    assert list(key_rows()) == [name for name, _ in SPEC.dotted()]


@pytest.mark.parametrize(("name", "key"), list(SPEC.dotted()), ids=[name for name, _ in SPEC.dotted()])
def test_limits_and_words_of_a_key_are_those_of_its_row(name, key):
    allowed = key_rows()[name][2]

    assert [text for text in stated(key) if text not in allowed] == []
    assert set(re.findall(r'`"(.*?)"`', allowed)) == {*key.choices, *key.words}


def stated(key: Key) -> list[str]:
    """What the row of a key has to say about its values."""
    limits = [limit for limit in (key.low, key.above, key.high, key.below) if limit is not None]
    return [str(limit) for limit in limits] + ([key.pattern_says] if key.pattern_says else [])


def test_defaults_are_those_that_a_short_specification_gets(tmp_path):
    path = tmp_path / "short.toml"
    path.write_text(MINIMAL, encoding="utf-8")
    used = dict(line.split(" = ", 1) for line in load_spec(path).defaults)

    for name, row in key_rows().items():
        key = dict(SPEC.dotted())[name]
        if key.required:
            assert row[3] == "required", name
        elif name == "part.number":
            assert (used[name], row[3]) == ("short", "the file's name")
        else:
            assert row[3] == used.get(name, "none"), name


def test_files_of_a_package_and_exit_codes_are_all_named():
    text = sections("###")
    files = [row[0].strip("`") for row in table_rows(text["What the package holds"])]
    codes = {int(row[0]) for row in table_rows(text["Exit codes"])}

    assert files == ["HT-1710" + ending for ending in FILES]
    assert codes == {cli.MET, cli.MISSED, cli.INPUT, cli.READ_BACK, cli.FAULT, cli.INTERRUPTED}
