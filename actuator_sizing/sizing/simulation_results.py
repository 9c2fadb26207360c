"""What a simulation answers: frozen, SI, with the unit in every name."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from pathlib import Path
from typing import TYPE_CHECKING, Any

from actuator_sizing.core.control import LoopSettings
from actuator_sizing.core.plant import Plant

if TYPE_CHECKING:
    import pandas as pd
    from matplotlib.figure import Figure


@dataclass(frozen=True)
class Simulation:
    """One set of a case, simulated; everything at the motor shaft unless the name says load.

    Attributes
    ----------
    input : str
        ``"cycle"``, ``"step"``, ``"sine"``, ``"stop"``, or the name of the file of samples.
    motor, gearhead, drive : str
        The set; ``gearhead`` is ``"direct"`` without one.
    plant : Plant
        What was moved.
    settings : LoopSettings
        Settings of the loops.
    limited_by : str
        What limits the bandwidth of the speed loop, or ``"stated"``.
    step_s : float
        Step of the simulation.
    series : DataFrame
        What happened over time, thinned where there are many samples.
    quantities : mapping of str to float
        Peaks, errors, bandwidths, margins.
    moves : DataFrame
        Each stop of the load with its settling time against the dwell; empty where there is none.
    steps : DataFrame
        Unit step responses of the three loops, against time.
    frequency : DataFrame
        Open-loop responses of the three loops and of the plant.
    notes : tuple of str
        Conditions and assumptions.
    bands : mapping of str to float
        Settling band and allowed error in the coordinate of the load (NaN: not given).
    cycle : str
        Name of the cycle; empty where the case does not name it.
    """

    case_name: str
    input: str
    motor: str
    gearhead: str
    drive: str
    plant: Plant
    settings: LoopSettings
    limited_by: str
    step_s: float
    series: pd.DataFrame
    quantities: Mapping[str, Any]
    moves: pd.DataFrame
    steps: pd.DataFrame
    frequency: pd.DataFrame
    notes: tuple[str, ...]
    current_basis: str
    is_linear_load: bool
    is_linear_motor: bool
    bands: Mapping[str, float] = field(default_factory=dict)
    cycle: str = ""

    @property
    def label(self) -> str:
        """Motor, gearhead and drive in one line."""
        return " + ".join([self.motor, self.gearhead, self.drive])

    @property
    def gains(self) -> Mapping[str, float | str]:
        """Every setting of the loops by name, in SI; change them by ``simulate(..., settings={...})``."""
        return {f.name: getattr(self.settings, f.name) for f in fields(self.settings)}

    def figures(self) -> dict[str, Figure]:
        """Draw what this simulation holds: response, following error, step responses, Bode diagram.

        Returns
        -------
        dict of str to matplotlib Figure
            By name.
        """
        from actuator_sizing.report.figures.dynamics import draw_simulation

        return draw_simulation(self)

    def write(self, folder: str | Path) -> tuple[Path, ...]:
        """Write tables as CSV, figures as SVG and the quantities as JSON; whole or not at all.

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
        from actuator_sizing.report.simulation_files import write_simulation

        return write_simulation(self, folder)
