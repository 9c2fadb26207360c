"""What changed since an earlier comparison."""

import json
import shutil
from pathlib import Path

import pytest

import actuator_sizing as act
from actuator_sizing.errors import InputError
from actuator_sizing.report.document.changes import changes_lines, changes_section
from actuator_sizing.report.json_results import render_json, results_dict
from actuator_sizing.report.revision import read_results, revision_since

DEMO = Path(__file__).parents[2] / "catalogs_demo"


@pytest.fixture(scope="module")
def earlier():
    return act.compare(act.read_case(DEMO / "tray_lift"))


@pytest.fixture
def later(tmp_path):
    """The same axis with a heavier carriage and less bus voltage."""
    shutil.copytree(DEMO / "catalog", tmp_path / "catalog")
    folder = shutil.copytree(DEMO / "tray_lift", tmp_path / "tray_lift")
    table = folder / "axis.csv"
    text = table.read_text(encoding="utf-8")
    changed = text.replace("minimum bus voltage,290", "minimum bus voltage,285").replace(
        "moving mass,38", "moving mass,39"
    )
    assert changed != text
    table.write_text(changed, encoding="utf-8")
    return act.compare(act.read_case(folder))


def test_nothing_changed(earlier):
    old = json.loads(render_json(earlier))
    revision = revision_since(old, results_dict(earlier))
    assert revision.is_same
    assert "Nothing changed" in changes_lines(revision)[0]


def test_changed_inputs_and_moved_results_are_named(earlier, later):
    revision = revision_since(json.loads(render_json(earlier)), results_dict(later))
    changed = {(change.table, change.label): (change.old, change.new) for change in revision.inputs}
    assert changed["axis", "moving mass"] == ("38 kg", "39 kg")
    assert changed["axis", "minimum bus voltage"] == ("290 V", "285 V")
    moved = {change.name for change in revision.results}
    assert "current_rms_a" in moved
    assert "duration_s" not in moved
    assert any(change.title == "Voltage" for change in revision.checks)
    section = changes_section(revision)
    texts = [
        cell.text for block in section.blocks if hasattr(block, "rows") for row in block.rows for cell in row
    ]
    assert "39 kg" in texts


def test_the_report_and_results_tell_it(earlier, later, tmp_path):
    earlier.write_report(tmp_path / "old", pdf=False)
    later.write_report(tmp_path / "new", pdf=False, since=read_results(tmp_path / "old"))
    page = (tmp_path / "new" / "sizing_report.html").read_text(encoding="utf-8")
    assert "Changes since the earlier revision" in page
    assert "39 kg" in page
    results = json.loads((tmp_path / "new" / "results.json").read_text(encoding="utf-8"))
    assert {"moving mass", "minimum bus voltage"} <= {
        change["label"] for change in results["changes"]["inputs"]
    }


@pytest.mark.parametrize(
    "content",
    ["", "[]", "{}", '{"schema": "other/1"}', "not json", "[" * 100_000],
    ids=lambda text: text[:12],
)
def test_what_is_no_earlier_result_is_refused(tmp_path, content):
    file = tmp_path / "results.json"
    file.write_text(content, encoding="utf-8")
    with pytest.raises(InputError, match="results.json"):
        read_results(file)


def test_a_missing_file_is_refused(tmp_path):
    with pytest.raises(InputError, match="cannot be read"):
        read_results(tmp_path / "nowhere.json")


def test_results_cut_short_do_not_break_it(earlier):
    whole = results_dict(earlier)
    for old in ({"schema": "actuator-sizing/results/1"}, {**whole, "sets": []}, {**whole, "case": {}}):
        revision = revision_since(old, whole)
        assert changes_lines(revision)
