"""The table `limits`: how checks are judged."""

from __future__ import annotations

from collections.abc import Mapping

from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.check_names import (
    ADVICE_CHECKS,
    ALLOWED_UTILISATIONS,
    CHECK_NAMES,
    DEFAULT_ALLOWED_UTILISATION,
    DEFAULT_RECOMMENDED_RESERVE,
    RECOMMENDED_RESERVES,
)
from actuator_sizing.case.model import Entry, Limit
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.errors import WARNING

_FULL = 1.0 + 1e-9  # of the capacity; typed percentages are rounded


def default_limits() -> dict[str, Limit]:
    """Limits of a case that says nothing about them, by check key."""
    return {
        key: Limit(
            key,
            "advice" if key in ADVICE_CHECKS else "yes",
            ALLOWED_UTILISATIONS.get(key, DEFAULT_ALLOWED_UTILISATION),
            RECOMMENDED_RESERVES.get(key, DEFAULT_RECOMMENDED_RESERVE),
        )
        for key, _ in CHECK_NAMES
    }


def understand_limits(
    parsed: ParsedTable | None, problems: ProblemList
) -> tuple[dict[str, Limit], list[Entry]]:
    """Limits of every check; those not listed, and cells left empty, keep their defaults.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table `limits`; None where the case has none.
    problems : ProblemList
        Takes what is wrong: a set that no check can fail would pass without having been judged.

    Returns
    -------
    limits : dict of str to Limit
        By check key.
    entries : list of Entry
        Every value with its origin.
    """
    limits, entries = default_limits(), []
    rows = {}
    if parsed is not None:
        check_required(parsed)
        rows = {str(title): index for index, title in enumerate(parsed.names)}
    for key, title in CHECK_NAMES:
        default, index = limits[key], rows.get(title)
        applies = _limit_entry(parsed, index, title, "applies", default.applies)
        allowed = _limit_entry(parsed, index, title, "allowed utilisation", default.allowed_utilisation)
        reserve = _limit_entry(parsed, index, title, "recommended reserve", default.recommended_reserve)
        entries += [applies, allowed, reserve]
        limits[key] = Limit(
            key, str(applies.value_si), float(allowed.value_si or 0.0), float(reserve.value_si or 0.0)
        )
    if parsed is not None and not any(limit.applies == "yes" for limit in limits.values()):
        problems.report("limits", None, parsed.heading("applies"), got="no check with 'yes'",
                        allowed="yes for at least one check, or nothing could fail",
                        remedy="Write yes for the checks that a set must pass.")  # fmt: skip
    elif parsed is not None:
        _warn_of_looseness(parsed, limits, problems)
    return limits, entries


def loosened_checks(limits: Mapping[str, Limit]) -> tuple[str, ...]:
    """Say which checks the table `limits` keeps from deciding, for every place that says that a set passes.

    Parameters
    ----------
    limits : mapping of str to Limit
        By check key.

    Returns
    -------
    tuple of str
        One sentence for the checks switched off, one for those that may be used above their capacity; none where
        there is nothing to say.
    """
    off = [title for key, title in CHECK_NAMES if _applies(limits, key) == "no"]
    over = _overstretched(limits)
    said = (
        f"Not judged, switched off in the table limits: {', '.join(off)}." if off else "",
        f"Allowed above 100 % in the table limits: {', '.join(over)}." if over else "",
    )
    return tuple(sentence for sentence in said if sentence)


def _applies(limits: Mapping[str, Limit], key: str) -> str:
    return limits[key].applies if key in limits else ""


def _overstretched(limits: Mapping[str, Limit]) -> list[str]:
    """Checks that decide only beyond their capacity, with what they allow."""
    return [
        f"{title} ({100.0 * limits[key].allowed_utilisation:.4g} %)"
        for key, title in CHECK_NAMES
        if _applies(limits, key) == "yes" and limits[key].allowed_utilisation > _FULL
    ]


def _warn_of_looseness(parsed: ParsedTable, limits: Mapping[str, Limit], problems: ProblemList) -> None:
    """Warn of checks that would decide, but are switched off or allowed above their capacity."""
    off = [title for key, title in CHECK_NAMES if limits[key].applies == "no" and key not in ADVICE_CHECKS]
    if off:
        problems.report("limits", None, parsed.heading("applies"), got=f"no for {', '.join(off)}",
                        allowed="yes for every check that can decide",
                        remedy="They are not judged, and no verdict says anything about them.",
                        severity=WARNING)  # fmt: skip
    over = _overstretched(limits)
    if over:
        problems.report("limits", None, parsed.heading("allowed_utilisation"), got=f"{', '.join(over)}",
                        allowed="at most 100 %",
                        remedy="A set passes there with more than its parts are stated to bear.",
                        severity=WARNING)  # fmt: skip


def _limit_entry(
    parsed: ParsedTable | None, index: int | None, title: str, name: str, default: float | str
) -> Entry:
    """One value of one check, stated or the default."""
    key, is_word = name.replace(" ", "_"), isinstance(default, str)
    unit = "" if is_word else "-"
    if parsed is None or index is None:
        return Entry("limits", None, title, name, "", default, unit, "assumed", "default")
    row = int(parsed.rows[index])
    if not parsed.stated(key)[index]:
        return Entry("limits", row, title, name, "", default, unit, "assumed", "default")
    value = parsed.text(key)[index] if is_word else float(parsed.number(key)[index])
    return Entry("limits", row, title, name, parsed.shown_cell(key, index), value, unit, "stated")
