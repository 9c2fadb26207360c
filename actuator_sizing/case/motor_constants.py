"""Torque constant and currents of a motor table in the row's own ampere, whatever the sheet states."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.catalogs import note_rows, warn_rows
from actuator_sizing.case.parsed_tables import ParsedTable
from actuator_sizing.core.conventions import PEAK_LINE_VOLTS, ampere_ratio, torque_constant_from_back_emf
from actuator_sizing.core.parameters import BASIS_DC, BRUSHED, CURRENT_BASES, SINUSOIDAL

BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int8]

_CURRENTS = ("continuous_current", "peak_current", "no_load_current", "rated_current", "stall_current")


def derive_constants(parsed: ParsedTable, linear: BoolArray, commutation: IntArray, basis: IntArray) -> None:
    """Bring constants and currents to the ampere of each row, and fill a missing torque or force constant.

    Parameters
    ----------
    parsed : ParsedTable
        The table `motors`; values are changed and added in place.
    linear : ndarray of bool, shape (n,)
        Rows of linear motors. [-]
    commutation, basis : ndarray of int, shape (n,)
        Codes of `core.parameters`. [-]
    """
    for key in ("torque_constant", "force_constant"):
        convert_ampere(parsed, key, basis, divide=True)
    for key in _CURRENTS:
        convert_ampere(parsed, key, basis)
    _from_back_emf(parsed, "torque_constant", "back_emf_constant", commutation, basis, ~linear)
    _from_back_emf(parsed, "force_constant", "linear_back_emf_constant", commutation, basis, linear)
    speed_constant = parsed.number("speed_constant")
    with np.errstate(divide="ignore"):
        back_emf = 1.0 / speed_constant
    _from_volts(parsed, "torque_constant", "speed_constant", "speed_constant_basis", back_emf, commutation,
                basis, ~linear)  # fmt: skip


def convert_ampere(parsed: ParsedTable, key: str, basis: IntArray, *, divide: bool = False) -> None:
    """Convert a column whose heading names an ampere other than the row's current basis.

    Parameters
    ----------
    parsed : ParsedTable
        Table whose column is changed in place.
    key : str
        Column.
    basis : ndarray of int, shape (n,)
        Current basis of each row. [-]
    divide : bool
        The quantity is per ampere.
    """
    unit = parsed.units.get(key)
    if unit is None or unit.basis in ("", None):
        return
    stated = unit.basis
    rows = parsed.stated(key) & parsed.stated("current_basis")
    code = CURRENT_BASES.index(stated) if stated in CURRENT_BASES else -1
    differs = rows & (basis != code)
    impossible = differs & ((basis == BASIS_DC) | (code == BASIS_DC) | (code < 0))
    parsed.problems.report_rows(
        parsed.table.name,
        parsed.rows,
        parsed.heading(key),
        impossible,
        got=lambda i: f"{parsed.shown_cell(key, i)} where the current basis is {CURRENT_BASES[basis[i]]}",
        allowed="the ampere of the current basis",
        remedy="Correct the heading or the current basis; direct and sinusoidal current do not convert.",
    )
    take = differs & ~impossible
    if not take.any():
        return
    ratio = ampere_ratio(stated, basis)
    values = parsed.number(key)
    values[take] = values[take] / ratio[take] if divide else values[take] * ratio[take]
    rule = f"converted from A {stated} of the heading to the current basis of the row, factor √2"
    parsed.note_rule(key, take, rule)
    note_rows(parsed, key, take, rule)


def _from_back_emf(
    parsed: ParsedTable, target: str, key: str, commutation: IntArray, basis: IntArray, rows: BoolArray
) -> None:
    _from_volts(parsed, target, key, "back_emf_constant_basis", parsed.number(key), commutation, basis, rows)


def _from_volts(
    parsed: ParsedTable,
    target: str,
    key: str,
    basis_key: str,
    back_emf: NDArray[np.float64],
    commutation: IntArray,
    basis: IntArray,
    rows: BoolArray,
) -> None:
    """Fill `target` from a constant per volt, by the volt that column, heading or commutation says."""
    rows = rows & parsed.stated(key) & parsed.stated("current_basis") & parsed.stated("commutation")
    if not rows.any():
        return
    volts, assumed = _volt_basis(parsed, key, basis_key, commutation, rows)
    name = key.replace("_", " ").replace("emf", "EMF")
    needed = rows & np.isnan(parsed.number(target))
    for word in PEAK_LINE_VOLTS:
        these = needed & (volts == word)
        if not these.any():
            continue
        constant = torque_constant_from_back_emf(back_emf, word, basis)
        sure = "assumed to be" if (assumed & these).any() else "in"
        parsed.derive(target, these, constant, f"{name} {sure} V {word}, to the current basis of the row")
        impossible = these & np.isnan(constant)
        impossible |= these & (commutation == BRUSHED) & (word != "DC")
        parsed.problems.report_rows(
            parsed.table.name,
            parsed.rows,
            parsed.heading(basis_key if parsed.stated(basis_key).any() else key),
            impossible,
            got=f"V {word}",
            allowed=lambda i: (
                "DC for a brushed motor"
                if commutation[i] == BRUSHED
                else "rms or peak, line-to-line or phase, where the current basis is rms or peak"
            ),
            remedy="Correct the basis of the constant or the current basis.",
        )
    guessed = needed & assumed & (commutation == SINUSOIDAL)
    warn_rows(parsed, key, guessed, "with no word on which volt; rms line-to-line is assumed",
              f"State it in a column '{parsed.table.column(basis_key).name}'; if it is the peak value, the "
              "torque constant is wrong by √2.")  # fmt: skip


def _volt_basis(
    parsed: ParsedTable, key: str, basis_key: str, commutation: IntArray, rows: BoolArray
) -> tuple[NDArray[np.object_], BoolArray]:
    """Which volt each row means, and where that is assumed from the commutation."""
    volts = parsed.text(basis_key).copy()
    in_heading = _full_basis(parsed.units[key].basis if key in parsed.units else "")
    if in_heading:
        contradicts = rows & (volts != "") & (volts != in_heading)
        parsed.problems.report_rows(
            parsed.table.name,
            parsed.rows,
            parsed.heading(basis_key),
            contradicts,
            got=lambda i: f"'{volts[i]}' beside the heading '{parsed.heading(key)}'",
            allowed="the same volt in both",
            remedy="Correct one of them.",
        )
        volts[volts == ""] = in_heading
    assumed = volts == ""
    volts[assumed & (commutation != SINUSOIDAL)] = "DC"
    volts[assumed & (commutation == SINUSOIDAL)] = "rms line-to-line"
    return volts, np.asarray(assumed)


def _full_basis(stated: str) -> str:
    """Volt of a heading; without a word on the terminals, between lines."""
    return f"{stated} line-to-line" if stated in ("rms", "peak") else stated
