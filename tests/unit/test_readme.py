"""What README.md tells people to type does what it says."""

import re
import shlex
import shutil
from pathlib import Path

import pytest

from actuator_sizing import cli

ROOT = Path(__file__).parents[2]
README = (ROOT / "README.md").read_text("utf-8")


@pytest.fixture(autouse=True)
def elsewhere(tmp_path, monkeypatch):
    """A folder with the demo cases, as README assumes, but not the user's own."""
    shutil.copytree(ROOT / "catalogs_demo", tmp_path / "catalogs_demo")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def blocks(language):
    return re.findall(rf"^ *```{language}\n(.*?)^ *```", README, re.MULTILINE | re.DOTALL)


def test_the_commands_work_one_after_another(elsewhere):
    lines = [line.strip() for block in blocks("sh") for line in block.splitlines()]
    mine = [line for line in lines if line.startswith(".venv/bin/actuator-sizing")]
    assert len(mine) >= 4
    for line in mine:
        with pytest.raises(SystemExit) as left:
            cli.main(shlex.split(line)[1:])
        assert left.value.code == 0, line
    assert (elsewhere / "columns.md").is_file()
    assert (elsewhere / "reports" / "my_axis" / "sizing_report.html").is_file()


def test_set_up_is_two_commands():
    """One runs the main job, one passes the tests; `.ci/run` takes the second from here."""
    lines = [line for line in README.splitlines() if line.startswith("python3 -m venv")]
    assert len(lines) == 2
    assert lines[0].endswith("actuator-sizing compare catalogs_demo/tray_lift")
    assert "-m pytest -q" in lines[1]


def test_the_notebook_lines_work(elsewhere):
    (code,) = blocks("python")
    scope = {}
    exec(compile(code, "README.md", "exec"), scope)
    assert scope["comparison"].passes
    assert (elsewhere / "reports" / "tray_lift" / "results.json").is_file()
