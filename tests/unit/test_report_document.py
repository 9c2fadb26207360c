"""The prepared document: order, honesty of the verdict, everything that a reviewer needs."""

import copy
import dataclasses
from datetime import date
from types import SimpleNamespace

import numpy as np
import pytest
from report_fixture import build_comparison, build_hostile

from actuator_sizing import console
from actuator_sizing.report.document import prepare_document
from actuator_sizing.report.document.blocks import Bullets, Facts, Paragraph, Table, Working
from actuator_sizing.report.document.verdict import unheld_load, verdict_sentence
from actuator_sizing.report.text import clean
from actuator_sizing.sizing.results import FAILS, LOW_RESERVE, NOT_CHECKED, PASSES, Checks

DAY = date(2025, 3, 4)


@pytest.fixture(scope="module")
def comparison():
    return build_comparison()


@pytest.fixture(scope="module")
def document(comparison):
    return prepare_document(comparison, DAY, ["speed_torque", "utilisation"])


def section(document, key):
    return next(s for s in document.sections if s.key == key)


def tables(part):
    return {block.caption: block for block in part.blocks if isinstance(block, Table)}


def text_of(document):
    parts = [document.title, document.verdict, *(f"{a} {b}" for a, b in document.cover)]
    for part in document.sections:
        for block in part.blocks:
            if isinstance(block, Paragraph):
                parts.append(block.text)
            elif isinstance(block, Bullets):
                parts += block.items
            elif isinstance(block, Facts):
                parts += [f"{a} {b}" for a, b in block.rows]
            elif isinstance(block, Working):
                parts += [block.title, *block.lines]
            elif isinstance(block, Table):
                parts += [f"{cell.text} {cell.note}" for cells in block.rows for cell in cells]
    return "\n".join(parts)


def test_sections_come_in_the_order_of_thought(document):
    assert [s.key for s in document.sections] == [
        "summary", "comparison", "checks", "working", "figures", "power", "dynamics", "inputs", "assumptions",
        "not_checked", "commissioning", "cautions", "sign_off",
    ]  # fmt: skip


def test_the_cover_says_what_whose_when_and_from_what(document, comparison):
    cover = dict(document.cover)
    assert cover["Axis"] == "Tray lift"
    assert cover["Revision"] == "B"
    assert cover["Prepared by"] == "M. Okafor"
    assert cover["Date"] == "2025-03-04"
    assert cover["Fingerprint of the inputs"] == comparison.case.fingerprint
    assert cover["Computed with"] == "actuator_sizing 0.1.0"


def test_the_verdict_names_set_governing_check_margin_and_what_was_not_checked(comparison):
    sentence, state = verdict_sentence(comparison)
    check = comparison.best.check("voltage")
    assert state == PASSES
    for part in ("Lynx 60-B + Planet 70/5 + Brook 5", "Voltage uses", f"{100 * check.utilisation:.1f} %",
                 f"margin of {100 * check.margin:.1f} %", "gearhead peak torque"):  # fmt: skip
        assert part in sentence


@pytest.mark.parametrize(
    ("verdict", "words"),
    [
        (LOW_RESERVE, "less than the recommended reserve"),
        (NOT_CHECKED, "fails none of the checks that could be made"),
        (FAILS, "No set passes. The nearest is"),
    ],
)
def test_each_verdict_has_its_own_words(comparison, verdict, words):
    best = dataclasses.replace(comparison.best, verdict=verdict)
    changed = dataclasses.replace(comparison, sets=(best, *comparison.sets[1:]))
    sentence, state = verdict_sentence(changed)
    assert words in sentence
    assert state == verdict


def limited(comparison, **changes):
    """The comparison of a case with some limits changed."""
    limits = dict(comparison.case.limits)
    for key, change in changes.items():
        limits[key] = dataclasses.replace(limits[key], **change)
    case = copy.copy(comparison.case)
    case.limits = limits
    return dataclasses.replace(comparison, case=case)


def test_checks_switched_off_or_overstretched_stand_beside_the_verdict(comparison):
    changed = limited(
        comparison,
        rms_current={"applies": "no"},
        motor_speed={"applies": "no"},
        winding_temperature={"allowed_utilisation": 1.2},
    )
    off = "Not judged, switched off in the table limits: RMS current, motor speed."
    over = "Allowed above 100 % in the table limits: winding temperature (120 %)."
    document = prepare_document(changed, DAY)
    bullets = next(b for b in section(document, "summary").blocks if isinstance(b, Bullets))
    for sentence in (off, over):
        assert sentence in document.verdict
        assert sentence in bullets.items
        assert sentence in console.verdict_sentence(changed)
        assert sentence not in console.verdict_sentence(comparison)
        assert sentence not in verdict_sentence(comparison)[0]
    assert "every check that was judged" in console.verdict_sentence(changed)


def test_a_matter_of_fit_nearer_to_its_limit_is_not_denied(comparison):
    plain, _ = verdict_sentence(comparison)
    assert "; no other check is nearer to its limit." in plain
    governs = comparison.best.check("voltage")

    def with_nearer(**changes):
        nearer = dataclasses.replace(
            governs, check="drive_bus_voltage", title="Drive bus voltage range", utilisation=1.0, **changes
        )
        best = dataclasses.replace(comparison.best, checks=Checks((*comparison.best.checks, nearer)))
        return verdict_sentence(dataclasses.replace(comparison, sets=(best, *comparison.sets[1:])))[0]

    said = with_nearer()
    assert "matters of fit, such as drive bus voltage range, are listed below" in said
    assert "no other check is nearer" not in said
    assert "nearer" not in with_nearer(is_advice=True)


def test_a_failing_set_names_the_checks_it_fails(comparison):
    loser = next(s for s in comparison.sets if s.motor == "Heron 80-S")
    sentence, _ = verdict_sentence(dataclasses.replace(comparison, sets=(loser,)))
    assert "fails peak torque over speed and voltage" in sentence


def test_a_comparison_without_any_set_still_makes_a_report(comparison):
    empty = dataclasses.replace(comparison, sets=())
    document = prepare_document(empty, DAY)
    assert document.verdict_state == FAILS
    assert "No set could be compared" in document.verdict


def test_every_check_of_the_leading_set_stands_in_its_group(document, comparison):
    found = {}
    for caption, table in tables(section(document, "checks")).items():
        for cells in table.rows:
            found[cells[0].text.removesuffix(" (advice)")] = (caption, cells)
    assert set(found) == {c.title for c in comparison.best.checks}
    caption, cells = found["winding temperature"]
    assert caption == "Checks: motor"
    check = comparison.best.check("winding_temperature")
    assert cells[2].text == "90"
    assert cells[3].text == "K"
    assert cells[4].share == pytest.approx(check.utilisation)
    assert cells[7].text == "200 ms, lift"
    assert check.formula in cells[0].note


def test_a_check_without_data_is_named_as_not_checked(document):
    cells = tables(section(document, "checks"))["Checks: gearhead"].rows[0]
    assert cells[6].text == NOT_CHECKED
    assert cells[4].text == "not known"
    assert cells[4].share is None
    missing = tables(section(document, "not_checked"))["Checks of the leading set that could not be made"]
    assert missing.rows[0][0].text == "gearhead peak torque"


def test_the_working_of_the_governing_check_comes_first(document, comparison):
    first = next(b for b in section(document, "working").blocks if isinstance(b, Working))
    assert first.title.startswith("voltage uses")
    assert first.lines == (comparison.best.check("voltage").working,)
    assert ("Inputs used", "moving mass (stated); ambient temperature (assumed)") in first.facts


def test_losers_have_reasons(document, comparison):
    part = tables(section(document, "comparison"))
    counts = {
        cells[0].text: cells[1].text for cells in part["Why sets lost, by the check that governs each"].rows
    }
    assert counts == {"peak torque over speed": "2", "winding temperature": "2"}
    nearest = part["The sets that came nearest and fail"].rows[0]
    assert nearest[0].text == "Heron 80-S + Planet 70/5 + Brook 5"
    assert nearest[5].text == "voltage"


def test_a_shortlist_that_is_not_complete_says_so(comparison):
    counts = dataclasses.replace(comparison.rejections, complete=False)
    document = prepare_document(dataclasses.replace(comparison, rejections=counts), DAY)
    assert "could be among the rest" in text_of(document)


def test_inputs_show_entry_understanding_origin_and_source(document):
    axis = tables(section(document, "inputs"))["Axis"]
    row = next(cells for cells in axis.rows if cells[1].text == "pulley diameter")
    assert [cell.text for cell in row] == [
        "3",
        "pulley diameter",
        "60 mm",
        "0.06 m",
        "stated",
        "drawing 4711 sheet 2",
    ]


def test_assumed_and_derived_values_are_listed_to_confirm(document):
    rows = tables(section(document, "assumptions"))["Confirm these before the design is released"].rows
    subjects = [cells[0].text for cells in rows]
    assert subjects == ["ambient temperature", "Lynx 60-B: resistance temperature coefficient", "friction"]


def test_commissioning_values_are_those_that_are_known(document):
    rows = tables(section(document, "commissioning"))["Predicted and measured"].rows
    predicted = {cells[0].text: cells[1].text for cells in rows}
    assert predicted["RMS motor current over one cycle"].endswith(" A rms")
    assert predicted["highest bus voltage"].startswith("not predicted")  # null in the results
    assert predicted["largest following error"] == "not predicted"
    assert all(cells[3].text == "" for cells in rows)  # to be filled in by hand


def test_nothing_computed_is_called_safe(document):
    text = text_of(document).lower()
    assert "safe" not in text.replace("safe torque off", "").replace("safety", "")
    for standard in ("ISO 12100", "ISO 13849-1", "IEC 62061", "IEC 61800-5-2", "ISO 13855", "ISO 13732-1"):
        assert standard.lower() in text


def test_unknown_quantities_never_print_as_nan_or_none(document):
    words = text_of(document).replace("\n", " ").split()
    assert not {"nan", "None", "inf", "NaN"} & set(words)


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("a\x00b", "a\N{REPLACEMENT CHARACTER}b"),
        ("x\u202ey", "x\N{REPLACEMENT CHARACTER}y"),
        ("\ud800", "\N{REPLACEMENT CHARACTER}"),
        ("\u05d0", "\u2068\u05d0\u2069"),
        ("a\r\nb", "a b"),
    ],
)
def test_text_of_users_is_made_printable(text, shown):
    assert clean(text) == shown


def test_hostile_names_prepare():
    document = prepare_document(build_hostile(), DAY)
    assert max(map(len, text_of(document).splitlines())) < 2000


def test_advice_not_met_shows_itself_as_such():
    check = dataclasses.replace(
        build_comparison().best.check("voltage"), is_advice=True, utilisation=1.5, verdict=LOW_RESERVE
    )
    assert "shown_verdict='advice not met'" in repr(check)
    assert LOW_RESERVE not in repr(check)
    assert "advice not met" in check._repr_html_()
    assert check.verdict == LOW_RESERVE


def test_a_load_that_no_brake_holds_is_told(comparison):
    def told(gravity, brake):
        case = copy.copy(comparison.case)
        case.motor_parameters = SimpleNamespace(brake_torque_nm=np.full(len(case.motors), brake))
        demand = SimpleNamespace(torque_by_cause={"gravity": np.array([[0.0, -gravity]])})
        return unheld_load(dataclasses.replace(comparison, case=case, demand=demand))

    assert "no brake of it holds the load when torque is removed" in told(2.0, np.nan)
    assert told(2.0, 3.0) == told(0.0, np.nan) == ""
