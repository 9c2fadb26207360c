"""One number for everything that was understood: the same inputs give the same, wherever they were kept."""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Catalog, Entry, Limit, Tolerance
from actuator_sizing.case.tables import TABLES

_NOT_HASHED = frozenset({"source", "note"})  # remarks change no result
_NOT_HASHED_QUANTITIES = frozenset({"catalog folder", "prepared by"})
_MANTISSA_BITS = 40  # about twelve digits; what a spreadsheet keeps of a number


def _canonical(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Round to `_MANTISSA_BITS`, so that the last digit a spreadsheet drops does not count."""
    mantissa, exponent = np.frexp(values + 0.0)
    scale = 2.0**_MANTISSA_BITS
    rounded = np.ldexp(np.rint(mantissa * scale) / scale, exponent) + 0.0
    rounded[np.isnan(rounded)] = np.nan
    return np.asarray(rounded, dtype="<f8")


def fingerprint(
    entries: Iterable[Entry],
    catalogs: Iterable[Catalog],
    limits: Mapping[str, Limit],
    tolerances: Iterable[Tolerance],
) -> str:
    """SHA-256 over the inputs as understood.

    Parameters
    ----------
    entries : iterable of Entry
        Axis and duty cycle.
    catalogs : iterable of Catalog
        The part tables.
    limits : mapping of str to Limit
        How checks are judged.
    tolerances : iterable of Tolerance
        Spreads.

    Returns
    -------
    str
        64 hexadecimal digits. Independent of file format, path, order of columns, units and remarks.
    """
    digest = hashlib.sha256()

    def add(*parts: Any) -> None:
        digest.update(("\x1f".join(map(_text, parts)) + "\n").encode("utf-8", "surrogatepass"))

    entries = tuple(entries)
    axis = sorted(
        (entry.label, _text(entry.value_si))
        for entry in entries
        if entry.table == "axis" and entry.label not in _NOT_HASHED_QUANTITIES
    )
    for label, value in axis:
        add("axis", label, value)
    for table in (
        "map", "inertias", "resistor_pulses", "bus_partners", "duty_cycle", "duty_types", "cycles", "points",
        "process", "measured",
    ):  # fmt: skip
        rows = [entry for entry in entries if entry.table == table and entry.column not in _NOT_HASHED]
        order = {row: position for position, row in enumerate(sorted({entry.row or 0 for entry in rows}))}
        for entry in sorted(rows, key=lambda entry: (entry.row or 0, entry.column)):
            add(table, order[entry.row or 0], entry.label, entry.column, entry.value_si)
    for check in sorted(limits):
        limit = limits[check]
        add("limits", check, limit.applies, limit.allowed_utilisation, limit.recommended_reserve)
    for spread in sorted(tolerances, key=lambda spread: (spread.table, spread.quantity)):
        add(
            "tolerances",
            spread.table,
            spread.quantity,
            spread.distribution,
            spread.width,
            spread.relative,
            spread.truncation,
            *(part for pair in sorted(spread.correlations) for part in (*pair[0], pair[1])),
        )
    for catalog in catalogs:
        add(catalog.table, len(catalog))
        for column in sorted(TABLES[catalog.table].columns, key=lambda column: column.key):
            values = catalog.values.get(column.key)
            if values is None or column.key in _NOT_HASHED:
                continue
            add(column.key)
            if values.dtype == object:
                digest.update("\x1f".join(values).encode("utf-8", "surrogatepass"))
            else:
                digest.update(_canonical(np.asarray(values, dtype=float)).tobytes())
    return digest.hexdigest()


def _text(value: object) -> str:
    if isinstance(value, float):
        return f"{float(_canonical(np.array([value]))[0]):.13g}"
    return str(value)
