"""`results.json`: the contract with other programs. Raw SI values; null is not known, never zero."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import asdict
from typing import TYPE_CHECKING, Any

from actuator_sizing.report.document.comparing import shown_pair, titles_of
from actuator_sizing.report.document.inputs import part_entries
from actuator_sizing.report.formatting import percent
from actuator_sizing.report.headroom_text import headroom_text
from actuator_sizing.report.lever_text import lever_text
from actuator_sizing.report.robustness_files import robustness_dict
from actuator_sizing.report.simulation_files import simulation_dict

if TYPE_CHECKING:
    from actuator_sizing.case.model import Case, Entry
    from actuator_sizing.report.revision import Revision
    from actuator_sizing.sizing.results import CheckResult, Comparison, CycleOfSet, CycleResult, SetResult

SCHEMA = "actuator-sizing/results/1"


def results_dict(comparison: Comparison) -> dict[str, Any]:
    """Collect the results under the names of the schema, in plain types that JSON knows.

    Parameters
    ----------
    comparison : Comparison
        The answer.

    Returns
    -------
    dict
        Values in SI; None where not known or not finite.
    """
    case, counts, study = comparison.case, comparison.rejections, comparison.robustness
    best = comparison.sets[0] if comparison.sets else None
    entries = [*case.entries, *part_entries(comparison, best)]
    moved = comparison.governing.dynamics
    return {
        "schema": SCHEMA,
        "version": comparison.version,
        "fingerprint": case.fingerprint,
        "case": {
            "name": case.name,
            "mechanism": case.mechanism.name,
            "inputs": [_input(entry) for entry in entries],
            "assumptions": [{"subject": subject, "text": text} for subject, text in comparison.assumptions],
            "remarks": [str(problem) for problem in case.problems],
        },
        "cycle": plain(comparison.cycle),
        "cycles": [_cycle(each) for each in comparison.cycles],
        "inertias": [plain(asdict(part)) for part in comparison.inertias],
        "ranked_by": comparison.ranked_by,
        "dynamics": None if moved is None else simulation_dict(moved),
        "sets": [_set(item, case) for item in comparison.sets],
        "rejected": {
            "count": int(counts.rejected),
            "by_check": plain(counts.by_check),
            "sets_total": int(counts.sets_total),
            "incompatible": int(counts.incompatible),
            "misfits": plain(counts.misfits),
            "survivors": int(counts.survivors),
            "confirmed_passing": int(counts.confirmed_passing),
            "evaluated": int(counts.evaluated),
            "not_checked": int(counts.not_checked),
            "complete": bool(counts.complete),
        },
        **_decisions(comparison),
        "questions": [
            {"part": part, "missing": missing, "check": check}
            for part, missing, check in comparison.questions
        ],
    } | ({} if study is None else {"robustness": robustness_dict(study)})


def _decisions(comparison: Comparison) -> dict[str, Any]:
    """What was asked for beyond pass and fail; null where it was not."""
    windows, headroom, found = comparison.windows, comparison.headroom, comparison.trade_offs
    titles = titles_of(comparison.sets)
    limits = None
    if headroom is not None:
        limits = plain(headroom.as_mapping())
        for entry, answer in zip(limits["quantities"], headroom.answers, strict=True):
            entry["displayed"] = headroom_text(comparison.case, answer, titles)._asdict()
    return {
        "trade_offs": None if found is None else plain(found.as_mapping()),
        "ratio_windows": None
        if windows is None
        else {
            "transmission": windows.assumption,
            "motors": [plain(window.as_mapping()) for window in windows.motors],
        },
        "headroom": limits,
    }


def render_json(comparison: Comparison, revision: Revision | None = None) -> bytes:
    """Write the results as UTF-8 text; the same, byte for byte, for the same comparison."""
    results = results_dict(comparison)
    if revision is not None:
        results["changes"] = plain(asdict(revision))
    text = json.dumps(results, ensure_ascii=False, allow_nan=False, indent=1)
    # a lone surrogate of a badly decoded table has no UTF-8 form; its escape is valid JSON
    return (text + "\n").encode("utf-8", "backslashreplace")


def _set(item: SetResult, case: Case) -> dict[str, Any]:
    return {
        "rank": int(item.rank),
        "motor": item.motor,
        "gearhead": item.gearhead,
        "ratio": plain(item.ratio),
        "drive": item.drive,
        "verdict": item.verdict,
        "governing_check": item.governing_check,
        "price": plain(item.price),
        "mass_kg": plain(item.mass_kg),
        "quantities": plain(item.quantities),
        "checks": [_check(check) for check in item.checks],
        "cycles": [_set_in_cycle(each) for each in item.cycles],
        "mix": plain(item.mix),
        "levers": [_lever(lever, case) for lever in item.levers],
    }


def _set_in_cycle(each: CycleOfSet) -> dict[str, Any]:
    return {
        "cycle": each.name,
        "verdict": each.verdict,
        "governing_check": each.governing_check,
        "quantities": plain(each.quantities),
        "utilisations": plain(each.utilisations),
    }


def _cycle(each: CycleResult) -> dict[str, Any]:
    cycle = each.case.cycle
    return {
        "cycle": cycle.name,
        "runs": cycle.runs,
        "duty_type": cycle.duty_type or None,
        "share": plain(cycle.share),
        "segments": [segment.name for segment in cycle.segments],
        "quantities": plain(each.quantities),
    }


def _lever(lever: Mapping[str, Any], case: Case) -> dict[str, Any]:
    values = {key: value for key, value in lever.items() if key not in ("changes", "entered")}
    entry: dict[str, Any] = plain(values)
    if "changes" in lever:
        entry["changes"] = [_lever(change, case) for change in lever["changes"]]
    return entry | {"displayed": lever_text(case, lever)._asdict()}


def _check(check: CheckResult) -> dict[str, Any]:
    demand, capacity, unit = shown_pair(check)
    return {
        "check": check.check,
        "title": check.title,
        "group": check.group,
        "demand": plain(check.demand),
        "capacity": plain(check.capacity),
        "unit": check.unit,
        "utilisation": plain(check.utilisation),
        "allowed": plain(check.allowed),
        "recommended_reserve": plain(check.recommended_reserve),
        "margin": plain(check.margin),
        "verdict": check.shown_verdict,
        "advice": bool(check.is_advice),
        "at_time_s": plain(check.at_time_s),
        "segment": check.segment,
        "cycle": check.cycle,
        "formula": check.formula,
        "source": check.source,
        "working": check.working,
        "missing": list(check.missing),
        "inputs": [{"input": name, "origin": origin} for name, origin in check.inputs],
        "displayed": {
            "demand": demand,
            "capacity": capacity,
            "unit": unit,
            "utilisation": percent(check.utilisation, check.allowed),
        },
    }


def _input(entry: Entry) -> dict[str, Any]:
    return {
        "table": entry.table,
        "row": None if entry.row is None else int(entry.row),
        "label": entry.label,
        "column": entry.column,
        "value_si": plain(entry.value_si),
        "unit": entry.unit,
        "as_entered": entry.as_entered,
        "origin": entry.origin,
        "rule": entry.rule,
        "source": entry.source,
    }


def plain(value: Any) -> Any:
    """Turn numpy scalars, arrays and mappings into plain types; what is not a finite number is None."""
    if value is None or isinstance(value, str | bool | int):
        return value
    if isinstance(value, Mapping):
        return {str(key): plain(item) for key, item in value.items()}
    if hasattr(value, "tolist"):
        return plain(value.tolist())
    if isinstance(value, list | tuple):
        return [plain(item) for item in value]
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    return str(value)
