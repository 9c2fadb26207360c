"""Files of the headroom of one set: its limits and its map as tables, JSON and a figure."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING

from actuator_sizing.report.json_results import plain

if TYPE_CHECKING:
    import pandas as pd

    from actuator_sizing.sizing.headroom import Headroom

SCHEMA = "actuator-sizing/headroom/1"


def render_headroom_json(found: Headroom) -> bytes:
    """Write the limits as UTF-8 text, SI; null is not known or no limit."""
    from actuator_sizing.version import __version__

    case = found.case
    head = {"schema": SCHEMA, "version": __version__, "fingerprint": case.fingerprint, "case": case.name}
    text = json.dumps(head | plain(found.as_mapping()), ensure_ascii=False, allow_nan=False, indent=1)
    return (text + "\n").encode("utf-8", "backslashreplace")


def write_headroom(found: Headroom, folder: str | Path) -> tuple[Path, ...]:
    """Write the limits and, where there is one, the map of payload against cycle time; whole or not at all.

    Parameters
    ----------
    found : Headroom
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
        If a file cannot be written.
    """
    from actuator_sizing.files import replace_folder_files
    from actuator_sizing.report.figures import house_style, to_svg
    from actuator_sizing.report.figures.payload_map import draw_payload_map
    from actuator_sizing.report.headroom_text import payload_unit

    files = {"headroom.json": render_headroom_json(found), "headroom.csv": _csv(found.table)}
    if found.map is not None:
        files["payload_map.csv"] = _csv(found.map.table)
        with house_style():
            figure = draw_payload_map(found.map, payload_unit(found.case, found.map))
            if figure is not None:
                files["payload_map.svg"] = to_svg(figure, "payload_map")
    return replace_folder_files(folder, files, obsolete=("payload_map.csv", "payload_map.svg"))


def _csv(table: pd.DataFrame) -> bytes:
    return str(table.to_csv(index=False, lineterminator="\r\n")).encode("utf-8-sig", "replace")
