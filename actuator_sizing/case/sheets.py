"""A table as it stands in a file, and the two forms that a case can have."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from actuator_sizing.errors import InputError, Problem

WORKBOOK_ENDING = ".xlsx"
_OTHER_SPREADSHEETS = (".xls", ".xlsm", ".xlsb", ".ods", ".csv", ".tsv")


@dataclass(frozen=True)
class Sheet:
    """One table as it stands in a file: the heading row first, every cell as the text that was typed."""

    name: str
    rows: tuple[tuple[str, ...], ...]


def is_workbook(path: Path) -> bool:
    """Whether a path names a workbook rather than a folder, by its ending.

    Raises
    ------
    InputError
        If the ending is that of another kind of spreadsheet.
    """
    ending = path.suffix.lower()
    if ending in _OTHER_SPREADSHEETS and not path.is_dir():
        raise InputError(
            [
                Problem(
                    path.name,
                    got=f"the ending '{path.suffix}'",
                    allowed="a folder, or a workbook that ends in .xlsx",
                    remedy="Choose a name with another ending.",
                )
            ]
        )
    return ending == WORKBOOK_ENDING
