"""Files of one simulation: tables as CSV, quantities as JSON, figures as SVG."""

from __future__ import annotations

import json
import math
from pathlib import Path
from typing import TYPE_CHECKING, Any

from actuator_sizing.version import __version__

if TYPE_CHECKING:
    from actuator_sizing.sizing.simulation_results import Simulation

SCHEMA = "actuator-sizing/simulation/1"


def simulation_dict(simulation: Simulation) -> dict[str, Any]:
    """Collect quantities, settings, stops and notes in plain types; what is not known is None.

    Parameters
    ----------
    simulation : Simulation
        The answer.

    Returns
    -------
    dict
        In SI, by name.
    """
    answer = {
        "input": simulation.input,
        "motor": simulation.motor,
        "gearhead": None if simulation.gearhead == "direct" else simulation.gearhead,
        "drive": simulation.drive,
        "current_basis": simulation.current_basis,
        "limited_by": simulation.limited_by,
        "step_s": simulation.step_s,
        "bands": dict(simulation.bands),
        "settings": dict(simulation.gains),
        "quantities": dict(simulation.quantities),
        "moves": simulation.moves.to_dict("records"),
        "notes": list(simulation.notes),
    }
    known: dict[str, Any] = known_values(answer)
    return known


def render_simulation_json(simulation: Simulation) -> bytes:
    """Write quantities, settings, stops and notes as JSON; what is not known is null.

    Parameters
    ----------
    simulation : Simulation
        The answer.
    """
    answer = {"schema": SCHEMA, "version": __version__, "case": simulation.case_name} | simulation_dict(
        simulation
    )
    return (json.dumps(answer, indent=1, ensure_ascii=False, allow_nan=False) + "\n").encode()


def write_simulation(simulation: Simulation, folder: str | Path) -> tuple[Path, ...]:
    """Write every file of a simulation; whole or not at all.

    Parameters
    ----------
    simulation : Simulation
        The answer.
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
    from actuator_sizing.files import replace_folder_files
    from actuator_sizing.report.figures import to_svg

    files = {"simulation.json": render_simulation_json(simulation)}
    tables = {"series": simulation.series, "moves": simulation.moves, "step_responses": simulation.steps,
              "frequency": simulation.frequency}  # fmt: skip
    for name, table in tables.items():
        if len(table):
            files[f"{name}.csv"] = table.to_csv(index=False, lineterminator="\r\n").encode("utf-8-sig")
    for name, figure in simulation.figures().items():
        files[f"figures/{name}.svg"] = to_svg(figure, name)
    return replace_folder_files(folder, files)


def known_values(value: Any) -> Any:
    """Replace what JSON cannot say: NaN and infinity become null, numbers of numpy plain ones."""
    if isinstance(value, dict):
        return {key: known_values(entry) for key, entry in value.items()}
    if isinstance(value, list | tuple):
        return [known_values(entry) for entry in value]
    if hasattr(value, "item"):
        value = value.item()
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
