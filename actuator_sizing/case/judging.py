"""The table `limits`: how checks are judged."""

from __future__ import annotations

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
    return limits, entries


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
