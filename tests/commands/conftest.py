from __future__ import annotations

from pathlib import Path

import pytest
from built import write_spec

from commands.running import Runner, in_its_own_process


@pytest.fixture
def run(capsys: pytest.CaptureFixture[str]) -> Runner:
    """Runs a command in this process."""
    return Runner(capsys)


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with a specification in it, and the current one."""
    monkeypatch.chdir(tmp_path)
    write_spec(tmp_path)
    return tmp_path


@pytest.fixture(scope="session")
def delivered(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of a package that the command built in a process of its own."""
    folder = tmp_path_factory.mktemp("delivered")
    write_spec(folder)
    outcome = in_its_own_process("build", "link.toml", cwd=folder)
    assert (outcome.code, outcome.err) == (0, "")
    return folder / "outputs" / "LK-3"
