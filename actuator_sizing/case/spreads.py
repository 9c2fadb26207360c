"""The table `tolerances`: how inputs spread about their values, and which of them vary together."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from actuator_sizing.case.axis import Axis
from actuator_sizing.case.catalogs import check_required
from actuator_sizing.case.cells import CellError, parse_number
from actuator_sizing.case.columns import Column, fold, nearest
from actuator_sizing.case.model import Tolerance
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.case.spreadable import Target, names_that_spread, targets
from actuator_sizing.case.tables import axis_quantities, find
from actuator_sizing.core.distributions import Distribution, is_possible, smallest_eigenvalue
from actuator_sizing.errors import WARNING
from actuator_sizing.units import UnitError, parse_unit

_TABLE = "tolerances"
#: A normal distribution never ends: its value must lie this many standard deviations from what is not allowed.
SAFE_DEVIATIONS = 5.0


@dataclass(frozen=True)
class _Row:
    """One row whose quantity, width and unit are understood."""

    index: int
    target: Target
    spread: Tolerance


def understand_tolerances(
    parsed: ParsedTable | None, decimal: str, axis: Axis, problems: ProblemList
) -> tuple[Tolerance, ...]:
    """Spreads of input quantities.

    Parameters
    ----------
    parsed : ParsedTable or None
        The table `tolerances`; None where the case has none.
    decimal : str
        Decimal mark of the table.
    axis : Axis
        The `axis` table, for its mechanism and values.
    problems : ProblemList
        Takes what is wrong.
    """
    if parsed is None:
        return ()
    check_required(parsed)
    rows = tuple(_once_each(_rows(parsed, decimal, axis, problems), parsed, problems))
    for row in rows:
        _check_width(row, parsed, axis, problems)
    return _correlated(rows, parsed, decimal, problems)


def _rows(parsed: ParsedTable, decimal: str, axis: Axis, problems: ProblemList) -> Iterator[_Row]:
    for index, name in enumerate(parsed.names):
        row = int(parsed.rows[index])
        width, unit_text = str(parsed.text("width")[index]), str(parsed.text("unit")[index])
        if not name or not width or not unit_text or not parsed.text("distribution")[index]:
            continue  # reported as an empty or wrong cell
        target = _target(parsed, index, axis, problems)
        if target is None:
            continue
        kind = target.column.kind_for(_side(target, axis))
        relative = unit_text == "%"
        try:
            unit = parse_unit(unit_text, "ratio" if relative else kind)
            value = parse_number(width, decimal)[0] * unit.factor
        except UnitError as error:
            problems.report(_TABLE, row, parsed.heading("unit"), got=shown(unit_text),
                            allowed=f"% or a unit of {kind}", remedy=str(error))  # fmt: skip
            continue
        except CellError as error:
            problems.report(_TABLE, row, parsed.heading("width"), got=shown(width),
                            allowed="a number > 0", remedy=error.remedy)  # fmt: skip
            continue
        if not value > 0.0:
            problems.report(_TABLE, row, parsed.heading("width"), got=f"{width} {unit_text}",
                            allowed="a number > 0", remedy="Remove the row if there is no spread.")  # fmt: skip
            continue
        if relative and kind in ("temperature", "angle"):
            problems.report(_TABLE, row, parsed.heading("unit"), got=f"{width} %",
                            allowed="K" if kind == "temperature" else "°",
                            remedy=f"A percentage of a{'n' if kind == 'angle' else ''} {kind} depends on where it "
                            "is counted from: state the width itself.")  # fmt: skip
            continue
        truncation = parsed.number("truncation")[index] if "truncation" in parsed.headings else np.nan
        yield _Row(
            index,
            target,
            Tolerance(
                row=row,
                quantity=target.column.name,
                distribution=str(parsed.text("distribution")[index]),
                width=value,
                relative=relative,
                table=target.table,
                truncation=3.0 if np.isnan(truncation) else float(truncation),
                source=str(parsed.text("source")[index]),
            ),
        )


def _side(target: Target, axis: Axis) -> str:
    """Which of two kinds of a column holds; the payload and process of the duty cycle belong to the load."""
    if target.table == "duty_cycle" and target.column.name == "payload" and axis.mechanism is not None:
        return "linear" if axis.mechanism.carries_mass() else "rotary"
    return axis.coordinate or "rotary"


def _target(parsed: ParsedTable, index: int, axis: Axis, problems: ProblemList) -> Target | None:
    """The quantity that a row means; None where that is not clear, which is then reported."""
    row, name = int(parsed.rows[index]), str(parsed.names[index])
    wanted = str(parsed.text("table")[index])
    found = targets(name, axis.mechanism)
    if wanted:
        found = tuple(target for target in found if target.table == wanted)
    if len(found) == 1:
        return found[0]
    if len(found) > 1:
        listed = ", ".join(target.table for target in found)
        problems.report(_TABLE, row, parsed.heading("table"), got="an empty cell",
                        allowed=f"one of: {listed}",
                        remedy=f"'{found[0].column.name}' stands in each: say which one spreads.")  # fmt: skip
        return None
    elsewhere = find(name, axis_quantities())
    if elsewhere is not None and elsewhere.is_number and axis.mechanism is not None and not wanted:
        known = {column.key for column in axis_quantities(axis.mechanism)}
        if elsewhere.key not in known:
            problems.report(_TABLE, row, parsed.heading("quantity"),
                            got=f"{shown(name)}, which a {axis.mechanism.name} does not have",
                            allowed="quantities of the chosen mechanism",
                            remedy="Nothing is calculated with it.", severity=WARNING)  # fmt: skip
            return None
    close = nearest(name, names_that_spread(axis.mechanism))
    problems.report(_TABLE, row, parsed.heading("quantity"), got=shown(name),
                    allowed="a quantity of the axis, of a motor, gearhead or drive, or payload, process force or "
                    "duration of the duty cycle" + (f", in the table {wanted}" if wanted else ""),
                    remedy=f"Did you mean '{close}'?" if close and fold(close) != fold(name)
                    else "This one cannot carry a spread. Remove the row.")  # fmt: skip
    return None


def _once_each(rows: Iterator[_Row], parsed: ParsedTable, problems: ProblemList) -> Iterator[_Row]:
    seen: dict[tuple[str, str], int] = {}
    for row in rows:
        place = (row.target.table, row.target.column.key)
        if place in seen:
            problems.report(_TABLE, row.spread.row, parsed.heading("quantity"),
                            got=f"{shown(row.spread.quantity)}, used before in row {seen[place]}",
                            allowed="each quantity once", remedy="Remove one of the rows.")  # fmt: skip
            continue
        seen[place] = row.spread.row
        yield row


# -- width against the value ------------------------------------------------------------------------------


def _check_width(row: _Row, parsed: ParsedTable, axis: Axis, problems: ProblemList) -> None:
    """Report a spread that reaches values which the quantity cannot have.

    A relative width is judged here for every part; a width in units of a catalog column when a part is chosen.
    """
    spread, column = row.spread, row.target.column
    stated = row.target.table == "axis"
    value = axis.number(column.key) if stated else np.nan
    if np.isnan(value) and not spread.relative:
        return
    if spread.relative and np.isnan(value):
        complaint = reach_complaint(spread, column, 1.0, "", relative_only=True)
    else:
        complaint = reach_complaint(spread, column, value, "")
    if complaint is not None:
        got, allowed, remedy = complaint
        problems.report(_TABLE, spread.row, parsed.heading("width"), got=got, allowed=allowed, remedy=remedy)


def distribution_of(spread: Tolerance, value: float) -> Distribution:
    """Distribution of a quantity whose value is known.

    Parameters
    ----------
    spread : Tolerance
        As stated. [-]
    value : float
        Value of the quantity, in SI. [-]
    """
    width = spread.width * abs(value) if spread.relative else spread.width
    return Distribution(spread.distribution, value, width, spread.truncation)


def reach_complaint(
    spread: Tolerance, column: Column, value: float, part: str, *, relative_only: bool = False
) -> tuple[str, str, str] | None:
    """Say why a spread is wider than its value allows: what was read, what is allowed, what to do.

    Parameters
    ----------
    spread : Tolerance
        As stated. [-]
    column : Column
        Declaration of the quantity, with its bounds. [-]
    value : float
        Value of the quantity, in SI. [-]
    part : str
        Name of the part that has it, empty for the axis. [-]
    relative_only : bool
        The value is not known: only that it must stay on its side of zero is judged. [-]
    """
    drawn = distribution_of(spread, value)
    low, high = drawn.bounds
    if not np.isfinite(low):
        low, high = value - SAFE_DEVIATIONS * drawn.width, value + SAFE_DEVIATIONS * drawn.width
    least, most = column.minimum, column.maximum
    if relative_only:
        least, most = (0.0 if least >= 0.0 or column.positive else -np.inf), np.inf
    slack = 1e-9 * drawn.width
    below = low < least - slack or (column.positive and low <= 0.0)
    if not below and high <= most + slack:
        return None
    room = (value - max(least, 0.0 if column.positive else least)) if below else most - value
    per_width = (high - value) / drawn.width
    # In the unit of the width: percent of the value, or SI.
    scale = 100.0 / abs(value) if spread.relative and value else 1.0
    unit = "%" if spread.relative else "in SI"
    got = f"{drawn.width * scale:.4g} {unit}{' of ' + shown(part) if part else ''}"
    reaches = "zero or less" if below and max(least, 0.0) == 0.0 else "a value that it cannot have"
    allowed = f"below {room / per_width * scale:.4g} {unit}, from where the spread reaches {reaches}"
    if spread.distribution == "normal":
        remedy = (
            f"A normal distribution is kept {SAFE_DEVIATIONS:g} standard deviations away from that. Lower the width, "
            "or choose uniform, triangular or truncated normal."
        )
    else:
        remedy = "Lower the width" + (" or the truncation." if "truncated" in spread.distribution else ".")
    return got, allowed, remedy


# -- correlation ------------------------------------------------------------------------------------------


def _correlated(
    rows: tuple[_Row, ...], parsed: ParsedTable, decimal: str, problems: ProblemList
) -> tuple[Tolerance, ...]:
    """The spreads with their correlations, each pair once."""
    pairs: dict[tuple[int, int], tuple[float, _Row]] = {}
    for position, row in enumerate(rows):
        text = str(parsed.text("correlation")[row.index])
        for other, value in _stated_correlations(text, row, rows, parsed, decimal, problems):
            pair = (min(position, other), max(position, other))
            if pair in pairs and pairs[pair][0] != value:
                problems.report(_TABLE, row.spread.row, parsed.heading("correlation"),
                                got=f"{value:g} with '{rows[other].spread.quantity}', but {pairs[pair][0]:g} in row "
                                f"{pairs[pair][1].spread.row}", allowed="one correlation for a pair",
                                remedy="State it in one of the two rows.")  # fmt: skip
                continue
            pairs[pair] = (value, row)
    matrix = np.eye(len(rows))
    for (i, j), (value, _) in pairs.items():
        matrix[i, j] = matrix[j, i] = value
    if pairs and not is_possible(matrix):
        worst = np.linalg.eigh(matrix)[1][:, 0]
        named = [rows[i].spread.quantity for i in np.flatnonzero(np.abs(worst) > 0.1 * np.abs(worst).max())]
        problems.report(_TABLE, None, parsed.heading("correlation"),
                        got=f"correlations of {', '.join(named)} that contradict each other (smallest eigenvalue "
                        f"{smallest_eigenvalue(matrix):.3g})",
                        allowed="a positive semidefinite matrix; a pair that is not stated counts as 0",
                        remedy="If A goes with B and B with C, A must go with C too: state that pair, or lower the "
                        "others.")  # fmt: skip
    found = []
    for position, row in enumerate(rows):
        mine = tuple(
            ((rows[j].target.table, rows[j].spread.quantity), value)
            for (i, j), (value, _) in pairs.items()
            if i == position and value != 0.0
        )
        found.append(replace(row.spread, correlations=mine))
    return tuple(found)


def _stated_correlations(
    text: str, row: _Row, rows: tuple[_Row, ...], parsed: ParsedTable, decimal: str, problems: ProblemList
) -> Iterator[tuple[int, float]]:
    """Pairs (position of the other row, correlation) of one cell."""

    def complain(got: str, allowed: str, remedy: str) -> None:
        problems.report(_TABLE, row.spread.row, parsed.heading("correlation"), got=got, allowed=allowed,
                        remedy=remedy)  # fmt: skip

    places: dict[str, list[int]] = {}
    for position, other in enumerate(rows):
        for name in {fold(other.spread.quantity), fold(f"{other.target.table} {other.spread.quantity}")}:
            places.setdefault(name, []).append(position)
    for part in filter(None, (piece.strip() for piece in text.split(";"))):
        name, _, figure = part.rpartition(" ")
        try:
            value = parse_number(figure, decimal)[0]
        except CellError:
            value = np.nan
        if not name or not -1.0 <= value <= 1.0:
            complain(shown(part), "a quantity of this table and a number from -1 to 1",
                     "Write for example 'torque constant 0.9', pairs separated by semicolons.")  # fmt: skip
            continue
        found = [p for p in places.get(fold(name), []) if rows[p] is not row]
        if len(found) == 1:
            yield found[0], value
        elif fold(name) == fold(row.spread.quantity) and not found:
            complain(shown(part), "another quantity", "A quantity always varies together with itself.")
        elif found:
            complain(shown(part), "a quantity that stands once in this table",
                     "Write its table before it, for example 'gearheads efficiency 0.5'.")  # fmt: skip
        else:
            close = nearest(name, (other.spread.quantity for other in rows if other is not row))
            complain(shown(part), "a quantity of this table",
                     f"Did you mean '{close}'?" if close else "Add a row for it, or remove it here.")  # fmt: skip


__all__ = ["SAFE_DEVIATIONS", "distribution_of", "reach_complaint", "understand_tolerances"]
