"""What a robustness study answers: frozen, SI, with the unit in every name."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.figure import Figure

FloatArray = NDArray[np.float64]

CONFIDENCE = 0.95


@dataclass(frozen=True)
class Robustness:
    """How sure one set passes under the spreads of its case.

    Attributes
    ----------
    case_name, motor, gearhead, drive : str
        The set; ``gearhead`` is ``"direct"`` without one.
    samples, exact_samples, sensitivity_samples, seed : int
        Samples at once; samples through the whole chain (0: none needed); rows of each of the sensitivity designs;
        seed of everything drawn.
    probability : mapping
        ``probability``, ``probability_low``, ``probability_high`` (Wilson interval of 95 %) and ``samples`` of
        passing every check that the set can fail.
    inputs : DataFrame
        The inputs as they were drawn.
    checks : DataFrame
        Probability of passing each check with its interval, and quantiles of its utilisation.
    quantities : DataFrame
        Quantiles of torque, current, temperature and so on; the unit is in each name.
    sensitivity : DataFrame
        First-order (Saltelli) and total (Jansen) indices with standard errors.
    swings : DataFrame
        Utilisation with one input at a time at its ends, or at two standard deviations.
    corners : DataFrame
        Worst corner of the bounded inputs for each check.
    not_checked : tuple of str
        Titles of checks whose data are missing without spread: they are part of no probability.
    largest_deviation : float
        Of samples taken at once from the whole chain, over what is allowed; NaN where none were. [-]
    notes : tuple of str
        Conditions of the study.
    shortlist : DataFrame
        Probability of each passing set, in the order of the ranking; empty unless a probability was asked for.
    wanted_probability : float
        What a set had to reach with the low end of its interval; NaN where none was asked for. [-]
    """

    case_name: str
    motor: str
    gearhead: str
    drive: str
    samples: int
    exact_samples: int
    sensitivity_samples: int
    seed: int
    probability: dict[str, Any]
    inputs: pd.DataFrame
    checks: pd.DataFrame
    quantities: pd.DataFrame
    sensitivity: pd.DataFrame
    swings: pd.DataFrame
    corners: pd.DataFrame
    not_checked: tuple[str, ...]
    largest_deviation: float
    notes: tuple[str, ...]
    shortlist: pd.DataFrame
    wanted_probability: float = np.nan

    @property
    def label(self) -> str:
        """Motor, gearhead and drive in one line."""
        return " + ".join([self.motor, self.gearhead, self.drive])

    @property
    def weakest_first(self) -> tuple[str, ...]:
        """Keys of the checks, those that are passed least often first, advice last; the tighter one of equals."""
        table = self.checks
        share = (table["utilisation_q95"] / table["allowed_utilisation"]).to_numpy(float)
        order = np.lexsort((-share, table["probability"].to_numpy(float), table["advice"].to_numpy(bool)))
        return tuple(table["check"].iloc[order])

    @property
    def weakest_that_move(self) -> tuple[str, ...]:
        """Keys of the checks on which an input acts, weakest first."""
        moving = self.swings["utilisation_low"] != self.swings["utilisation_high"]
        moving &= self.swings["utilisation_nominal"].notna()  # else it applies with the spread only
        known = set(self.swings.loc[moving, "check"])
        return tuple(check for check in self.weakest_first if check in known)

    def passes_with(self, probability: float) -> bool:
        """Whether the set passes with at least that probability, with 95 % confidence.

        Parameters
        ----------
        probability : float
            0 to 1. [-]

        Notes
        -----
        The low end of the two-sided 95 % interval decides.
        """
        return bool(self.probability["probability_low"] >= probability)

    def title_of(self, check: str) -> str:
        """Title of a check by its key."""
        return str(self.checks.set_index("check")["title"][check])

    def figures(self) -> dict[str, Figure]:
        """Draw probabilities, swings and sensitivities.

        Returns
        -------
        dict of str to matplotlib Figure
            By name; what has nothing to show is left out.
        """
        from actuator_sizing.report.figures.robustness import draw_robustness

        return draw_robustness(self)

    def write(self, folder: str | Path) -> tuple[Path, ...]:
        """Write tables as CSV and one workbook, figures as SVG, and everything as JSON; whole or not at all.

        Parameters
        ----------
        folder : str or Path
            Output folder; made if missing.

        Returns
        -------
        tuple of Path
            The files written.

        Raises
        ------
        OutputError
            If a file cannot be written; what was there before is untouched.
        """
        from actuator_sizing.report.robustness_files import write_robustness

        return write_robustness(self, folder)

    def _repr_html_(self) -> str:
        """Probabilities as a table for notebooks."""
        from actuator_sizing.sizing.notebook import robustness_html

        return robustness_html(self)
