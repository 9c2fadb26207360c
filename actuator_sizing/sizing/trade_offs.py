"""Which passing sets are worth a look: those that no other one beats in price, mass, energy and reserve at once."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.model import Case
from actuator_sizing.sizing.checks import Sets
from actuator_sizing.sizing.judging import ORDER, Verdicts
from actuator_sizing.sizing.ranking import ranking_key
from actuator_sizing.sizing.results import NOT_CHECKED

if TYPE_CHECKING:
    import pandas as pd

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

#: What is compared, all to be small but the reserve; `ranking.RANKINGS` says what each is.
CRITERIA = ("price", "mass", "energy", "reserve")

_MOST_IN_RESULTS = 200


@dataclass(frozen=True)
class TradeOff:
    """One passing set with what it costs.

    Attributes
    ----------
    motor, gearhead, drive : str
        Its parts; "direct" without gearhead.
    parts : tuple of int
        The same by index into the catalogs. [-]
    values : mapping of str to float
        Price, mass [kg], energy [J] and reserve, by criterion; NaN where not known. [-]
    dominated_by : int or None
        Which set of the front is at least as good in everything and better in something: its place in
        `TradeOffs.sets`; None for a set of the front. [-]
    is_compared : bool
        False where a criterion is not known: such a set beats nobody and is beaten by nobody.
    """

    motor: str
    gearhead: str
    drive: str
    parts: tuple[int, int, int]
    values: Mapping[str, float]
    dominated_by: int | None
    is_compared: bool

    @property
    def label(self) -> str:
        """Motor, gearhead and drive in one line."""
        return " + ".join([self.motor, self.gearhead, self.drive])

    @property
    def on_front(self) -> bool:
        """Whether no other set beats it."""
        return self.is_compared and self.dominated_by is None


@dataclass(frozen=True)
class TradeOffs:
    """Every passing set that was evaluated, in ranked order, and who beats whom.

    Attributes
    ----------
    criteria : tuple of str
        What was compared, of `CRITERIA`; one that is known of no set is left out.
    sets : tuple of TradeOff
        Best first by the ranking of the comparison.
    """

    criteria: tuple[str, ...]
    sets: tuple[TradeOff, ...]

    @property
    def front(self) -> tuple[TradeOff, ...]:
        """The sets that no other one beats in everything."""
        return tuple(one for one in self.sets if one.on_front)

    @property
    def table(self) -> pd.DataFrame:
        """One row per set: its parts, the criteria, whether it is on the front, and else by whom it is beaten."""
        import pandas as pd

        rows = [
            {
                "motor": one.motor,
                "gearhead": one.gearhead,
                "drive": one.drive,
                **{name: one.values[name] for name in self.criteria},
                "on_front": one.on_front,
                "dominated_by": "" if one.dominated_by is None else self.sets[one.dominated_by].label,
            }
            for one in self.sets
        ]
        return pd.DataFrame(rows)

    def _repr_html_(self) -> str:
        return str(
            self.table.to_html(index=False, escape=True, float_format="{:.4g}".format, na_rep="not known")
        )

    def as_mapping(self) -> Mapping[str, Any]:
        """For results.json: the front, then the first of the others; in J, kg and the currency of the catalogs."""
        ordered = sorted(self.sets, key=lambda one: not one.on_front)
        kept = ordered[: max(len(self.front), _MOST_IN_RESULTS)]
        return {
            "criteria": list(self.criteria),
            "passing": len(self.sets),
            "sets": [
                {
                    "motor": one.motor,
                    "gearhead": None if one.gearhead == "direct" else one.gearhead,
                    "drive": one.drive,
                    **{name: one.values[name] for name in self.criteria},
                    "on_front": one.on_front,
                    "dominated_by": None
                    if one.dominated_by is None
                    else {
                        name: getattr(self.sets[one.dominated_by], name)
                        for name in ("motor", "gearhead", "drive")
                    },
                }
                for one in kept
            ],
        }


def find_trade_offs(
    case: Case, several: tuple[Sets, ...], verdicts: Verdicts, index: IndexArray, order: IndexArray
) -> TradeOffs:
    """Find the sets that no other one beats.

    Parameters
    ----------
    case : Case
        The case. [-]
    several : tuple of Sets
        Evaluated sets, once for each cycle. [-]
    verdicts : Verdicts
        Their verdicts. [-]
    index : ndarray of int, shape (S, 3)
        Motor, gearhead and drive. [-]
    order : ndarray of int, shape (S,)
        Ranked order; only sets that pass are taken. [-]

    Returns
    -------
    TradeOffs
        Exact among the sets that were evaluated.
    """
    passing = order[verdicts.verdict[order] < ORDER.index(NOT_CHECKED)]
    keys = {name: ranking_key(case, several, verdicts, index, name)[passing] for name in CRITERIA}
    criteria = tuple(name for name in CRITERIA if len(passing) and np.isfinite(keys[name]).any())
    cost = np.stack([keys[name] for name in criteria], axis=1) if criteria else np.empty((len(passing), 0))
    beaten_by = dominated_by(cost)
    compared: NDArray[np.bool_] = np.all(np.isfinite(cost), axis=1)
    shown = {name: np.where(np.isfinite(key), key, np.nan) for name, key in keys.items()}
    shown["reserve"] = 1.0 - shown["reserve"]  # the key is the largest share of what is allowed
    names = [getattr(case, table).names for table in ("motors", "gearheads", "drives")]
    made = []
    for row, place in enumerate(passing.tolist()):
        motor, gearhead, drive = (int(i) for i in index[place])
        direct = bool(several[0].gearheads.is_direct[place])
        made.append(
            TradeOff(
                names[0][motor], "direct" if direct else names[1][gearhead], names[2][drive],
                (motor, gearhead, drive), {name: float(shown[name][row]) for name in criteria},
                None if beaten_by[row] < 0 else int(beaten_by[row]), bool(compared[row]),
            )
        )  # fmt: skip
    return TradeOffs(criteria, tuple(made))


def dominated_by(cost: FloatArray) -> IndexArray:
    """For each row, which row of the front is at least as small in every column and smaller in one.

    Parameters
    ----------
    cost : ndarray, shape (S, C)
        What is to be small; a row with a value that is not finite is neither compared nor compared with. [-]

    Returns
    -------
    ndarray of int, shape (S,)
        First such row of the front, −1 where there is none. Rows that are alike in every column stay together. [-]

    Notes
    -----
    In the order of the first column, then the next, whatever beats a row stands before it: one pass against the
    front found so far is enough (Kung, Luccio and Preparata, 1975, from memory).

    Examples
    --------
    >>> dominated_by(np.array([[1.0, 5.0], [2.0, 6.0], [3.0, 1.0], [1.0, 5.0]])).tolist()
    [-1, 0, -1, -1]
    """
    count, width = cost.shape
    answer = np.full(count, -1, dtype=np.intp)
    rows = np.flatnonzero(np.isfinite(cost).all(axis=1))
    if width == 0 or not len(rows):
        return answer
    ordered = rows[np.lexsort(cost[rows].T[::-1])]
    front = np.empty((len(ordered), width))
    members = np.empty(len(ordered), dtype=np.intp)
    size = 0
    for row in ordered:
        mine = cost[row]
        known = front[:size]
        beats = np.flatnonzero((known <= mine).all(axis=1) & (known < mine).any(axis=1))
        if len(beats):
            answer[row] = members[beats].min()
        else:
            front[size], members[size] = mine, row
            size += 1
    return answer
