"""An installation holds every module and the whole library, and works from any folder."""

from __future__ import annotations

import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
BUILD = "from setuptools import setup; setup(script_args=['-q', 'build_py', '--build-lib', 'built'])"


@pytest.fixture(scope="module")
def built(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """What goes into a wheel, built without a network from a copy that only has what is needed for it."""
    pytest.importorskip("setuptools", reason="builds wheels; pip fetches it when it installs")
    clone = tmp_path_factory.mktemp("clone")
    for name in ("pyproject.toml", "README.md", "LICENSE"):
        shutil.copy(ROOT / name, clone)
    for name in ("layoutgen", "substrates"):
        shutil.copytree(ROOT / name, clone / name, ignore=shutil.ignore_patterns("__pycache__"))
    subprocess.run([sys.executable, "-c", BUILD], cwd=clone, check=True, timeout=120)
    return clone / "built"


def names(folder: Path, pattern: str) -> set[str]:
    return {path.relative_to(folder).as_posix() for path in folder.rglob(pattern)}


def test_every_module_is_installed(built):
    assert names(built / "layoutgen", "*.py") == names(ROOT / "layoutgen", "*.py")


def test_the_whole_library_is_installed(built):
    shipped = names(ROOT / "substrates", "*.toml")

    assert len(shipped) > 12
    assert names(built / "layoutgen" / "substrates", "*.toml") == shipped


def test_what_is_installed_plans_a_filter_away_from_the_clone(built, tmp_path):
    script = (
        "import sys; sys.path.insert(0, sys.argv.pop(1)); import layoutgen; from layoutgen.cli import main; "
        "print(layoutgen.__file__); print(main(sys.argv[1:]))"
    )

    def run(*words: str) -> list[str]:
        done = subprocess.run(
            [sys.executable, "-I", "-W", "error", "-c", script, str(built), *words],
            cwd=tmp_path,
            capture_output=True,
            text=True,
            check=True,
            timeout=120,
        )
        lines = done.stdout.splitlines()
        assert Path(lines[0]).is_relative_to(built)
        assert lines[-1] == "0"
        return lines

    assert any(line.startswith("alumina-9.80") for line in run("substrates"))
    run("new", "somewhere.toml")
    assert any("pass  return loss" in line for line in run("plan", "somewhere.toml"))
