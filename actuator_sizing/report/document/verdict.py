"""The first page: what was sized, and the answer in one sentence."""

from __future__ import annotations

import math
from datetime import date
from typing import TYPE_CHECKING

import numpy as np

from actuator_sizing.case.judging import loosened_checks
from actuator_sizing.report.document.blocks import Bullets, Facts, Paragraph, Section
from actuator_sizing.report.formatting import percent, quantity
from actuator_sizing.report.text import clean, in_sentence, option, plural
from actuator_sizing.sizing.results import ADVICE_NOT_MET, FAILS, LOW_RESERVE, NOT_CHECKED, PASSES

_NO_GRAVITY = 1e-9  # N·m, N or m/s²: what rounding leaves of a balanced or level axis

if TYPE_CHECKING:
    from collections.abc import Sequence

    from actuator_sizing.case.model import Case
    from actuator_sizing.sizing.results import CheckResult, Comparison, SetResult


def cover_facts(comparison: Comparison, day: date) -> tuple[tuple[str, str], ...]:
    """Collect the cover block: what, whose, when, from which inputs and by which version."""
    case = comparison.case
    return (
        ("Axis", option(case, "title", clean(case.name))),
        ("Case", clean(case.name)),
        ("Mechanism", clean(case.mechanism.name)),
        ("Revision", option(case, "revision", "not stated")),
        ("Prepared by", option(case, "prepared by", "not stated")),
        ("Date", day.isoformat()),
        ("Fingerprint of the inputs", clean(case.fingerprint)),
        ("Computed with", f"actuator_sizing {comparison.version}".strip()),
    )


def governing(item: SetResult) -> CheckResult | None:
    """Find the check that governs a set; None when no check could be made."""
    for check in item.checks:
        if check.check == item.governing_check:
            return check
    return None


def describe_set(item: SetResult) -> str:
    """Name motor, gearhead with ratio, and drive."""
    gearhead = "direct drive" if item.gearhead is None else clean(item.gearhead, 60)
    return f"{clean(item.motor, 60)} + {gearhead} + {clean(item.drive, 60)}"


def describe_check(check: CheckResult) -> str:
    """Say how far a check is used, and what is left."""
    if check.utilisation is not None and math.isinf(check.utilisation):
        return f"{check.title} has no capacity left at all"
    use = f"{percent(check.utilisation, check.allowed)} of the capacity"
    if check.cycle:
        use += f" in the cycle {clean(check.cycle, 60)}"
    if check.allowed != 1.0:
        use += f" ({percent(check.allowed)} allowed)"
    if check.margin is None:
        return f"{check.title} uses {use}"
    return f"{check.title} uses {use}, a margin of {percent(check.margin, 1.0 / check.allowed - 1.0)}"


def verdict_sentence(comparison: Comparison) -> tuple[str, str]:
    """Put the answer into one sentence and its verdict, with what the limits keep from deciding."""
    sentence, verdict = _answer(comparison)
    return " ".join((sentence, *loosened_checks(comparison.case.limits))), verdict


def _nearness(check: CheckResult | None, others: Sequence[CheckResult]) -> str:
    """Say that no check is nearer to its limit, as far as that is true."""
    if check is None or check.utilisation is None:
        return ""
    used = check.utilisation / check.allowed
    nearer = [c for c in others if c.utilisation is not None and c.utilisation / c.allowed > used]
    if not nearer:
        return "; no other check is nearer to its limit"
    fits = [in_sentence(c.title) for c in nearer if not c.is_advice]
    if not fits:
        return ""  # advice, which is told by itself
    return (
        "; no other check of those that judge load is nearer to its limit (matters of fit, such as "
        f"{fits[0]}, are listed below)"
    )


def _answer(comparison: Comparison) -> tuple[str, str]:
    if not comparison.sets:
        return "No set could be compared: no motor, gearhead and drive of the catalogs fit together.", FAILS
    best = comparison.sets[0]
    name, check = describe_set(best), governing(best)
    reason = f" {_capital(describe_check(check))}{_nearness(check, best.checks)}." if check else ""
    open_checks = [in_sentence(c.title) for c in best.checks if c.verdict == NOT_CHECKED and not c.is_advice]
    every = "every check that could be made" if open_checks else "every check"
    if not open_checks and any(limit.applies == "no" for limit in comparison.case.limits.values()):
        every = "every check that was judged"
    if open_checks:
        reason += f" Not checked for want of data: {_listed(open_checks)}."
    if best.verdict == PASSES:
        return f"{name} passes {every} with the recommended reserve.{reason}", PASSES
    if best.verdict == LOW_RESERVE:
        return f"{name} passes {every}, but with less than the recommended reserve.{reason}", LOW_RESERVE
    if best.verdict == NOT_CHECKED:
        return f"{name} fails none of the checks that could be made.{reason}", NOT_CHECKED
    failing = [in_sentence(c.title) for c in best.checks if c.verdict == FAILS and not c.is_advice]
    reason = f" {_capital(describe_check(check))}." if check else ""
    return f"No set passes. The nearest is {name}, which fails {_listed(failing)}.{reason}", FAILS


def verdict_section(comparison: Comparison) -> Section:
    """Say what the answer rests on, under the sentence on the cover."""
    case, around = comparison.case, comparison.case.surroundings
    facts: list[tuple[str, str]] = []
    if comparison.sets:
        best = comparison.sets[0]
        facts += [
            ("Motor", clean(best.motor)),
            ("Gearhead", "none (direct drive)" if best.gearhead is None else clean(best.gearhead)),
            ("Ratio", f"{best.ratio:.6g}"),
            ("Drive", clean(best.drive)),
        ]
        if best.price is not None:
            facts.append(("Price", f"{best.price:.2f} (currency of the catalogs)"))
        if best.mass_kg is not None:
            facts.append(("Mass", quantity(best.mass_kg, "kg")))
    facts += [
        *(_cycle_fact(one) for one in case.by_cycle()),
        ("Ambient", f"{quantity(around.ambient_degc, '°C')}, {quantity(around.altitude_m, 'm')} altitude"),
        ("DC bus, minimum / nominal / maximum", _bus(comparison)),
    ]
    notes = [
        "Signs: motor torque, speed and power are positive when they drive the load along +x; positive "
        "power is motoring.",
        "Ratio is input turns over output turns; utilisation is demand over capacity; margin is capacity "
        "over demand minus 1.",
    ]
    advice = [
        in_sentence(c.title)
        for c in (comparison.sets[0].checks if comparison.sets else ())
        if c.shown_verdict == ADVICE_NOT_MET
    ]
    if advice:
        notes.insert(0, f"Advice not met, which does not decide the verdict: {_listed(advice)}.")
    notes[:0] = (*loosened_checks(case.limits), *filter(None, (unheld_load(comparison),)))
    return Section(
        "summary",
        "The chosen set" if comparison.passes else "The leading set",
        (Facts(tuple(facts)), Bullets(tuple(notes)))
        if comparison.sets
        else (
            Paragraph("There is no set to show; see the remarks on the input.", "note"),
            Facts(tuple(facts)),
        ),
    )


def unheld_load(comparison: Comparison) -> str:
    """Say that nothing holds the load of the leading set without torque; empty where gravity does not act."""
    if not comparison.sets or comparison.demand is None:
        return ""
    best, case = comparison.sets[0], comparison.case
    gravity = float(np.abs(comparison.demand.torque_by_cause["gravity"]).max(initial=0.0))
    gravity += abs(case.mechanism.specific_gravity_m_s2)  # on the moving part of a linear motor
    if gravity <= _NO_GRAVITY or float(case.motor_parameters.brake_torque_nm[best.motor_index]) > 0.0:
        return ""
    return (
        f"Gravity acts, and {clean(best.motor, 60)} states no holding brake: no brake of it holds the load when "
        "torque is removed."
    )


def _cycle_fact(case: Case) -> tuple[str, str]:
    name, runs = clean(case.cycle.name, 60), case.cycle.runs
    return (
        f"Cycle {name}".strip(),
        f"{plural(len(case.segments), 'segment')}, {quantity(case.cycle_duration_s, 's')}"
        + (f", {runs}" if name else ""),
    )


def _bus(comparison: Comparison) -> str:
    around = comparison.case.surroundings
    values = (around.bus_min_v, around.bus_nominal_v, around.bus_max_v)
    return " / ".join(quantity(value, "V") for value in values)


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _listed(names: list[str]) -> str:
    if not names:
        return "a check"
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
