"""How results show themselves in a notebook: compact tables, every text escaped."""

from __future__ import annotations

from html import escape
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable

    import pandas as pd

    from actuator_sizing.sizing.results import CheckResult, Comparison, SetResult
    from actuator_sizing.sizing.robustness.results import Robustness

_SHOWN = 12


def checks_frame(checks: Iterable[CheckResult]) -> pd.DataFrame:
    """Checks as a table, SI values, index by key.

    Parameters
    ----------
    checks : iterable of CheckResult
        Checks of one set. [-]

    Returns
    -------
    pandas.DataFrame
        Columns title, demand, capacity, unit, utilisation, allowed, verdict, at_time_s, segment,
        and cycle where cycles have names. [-]
    """
    import pandas as pd

    checks = tuple(checks)
    names: tuple[str, ...] = (
        "title",
        "demand",
        "capacity",
        "unit",
        "utilisation",
        "allowed",
        "verdict",
        "at_time_s",
        "segment",
    )
    if any(check.cycle for check in checks):
        names = (*names, "cycle")
    rows = [
        {name: getattr(check, name) for name in names} | {"verdict": check.shown_verdict} for check in checks
    ]
    keys = [check.check for check in checks]
    return pd.DataFrame(rows, columns=list(names), index=pd.Index(keys, name="check"))


def checks_html(checks: Iterable[CheckResult]) -> str:
    """Checks of one set as an HTML table."""
    return str(
        checks_frame(tuple(checks)).to_html(escape=True, float_format="{:.4g}".format, na_rep="not known")
    )


def set_html(item: SetResult) -> str:
    """One set: its parts, verdict and checks."""
    head = (
        f"<p><b>{escape(item.label)}</b>: {escape(item.verdict)}, {escape(item.governing_check)} governs</p>"
    )
    return head + checks_html(item.checks)


def comparison_html(comparison: Comparison) -> str:
    """The leading sets of a comparison."""
    import pandas as pd

    names = ("rank", "motor", "gearhead", "ratio", "drive", "verdict", "governing_check", "price", "mass_kg")
    rows = [{name: getattr(item, name) for name in names} for item in comparison.sets[:_SHOWN]]
    for row, item in zip(rows, comparison.sets, strict=False):
        row["utilisation"] = item.check(item.governing_check).utilisation
    table = pd.DataFrame(rows).to_html(
        index=False, escape=True, float_format="{:.4g}".format, na_rep="not known"
    )
    counts = comparison.rejections
    return (
        f"<p><b>{escape(comparison.case.name)}</b>, ranked by {escape(comparison.ranked_by)}: "
        f"{counts.confirmed_passing} of {counts.sets_total} sets pass, {counts.rejected} rejected</p>{table}"
    )


def robustness_html(study: Robustness) -> str:
    """Probabilities of one set: all checks together, then each of them."""
    found = study.probability
    head = (
        f"<p><b>{escape(study.label)}</b> passes every check in {found['probability']:.4g} of {found['samples']} "
        f"samples (95 % interval {found['probability_low']:.4g} to {found['probability_high']:.4g}); {study.samples} "
        f"were asked for, {study.exact_samples} went through the whole chain</p>"
    )
    names = ["title", "nominal_utilisation", "utilisation_q95", "allowed_utilisation", "probability",
             "probability_low", "probability_high", "samples"]  # fmt: skip
    table = study.checks.set_index("check")[names]
    return head + str(table.to_html(escape=True, float_format="{:.4g}".format, na_rep="not known"))
