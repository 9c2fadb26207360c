"""Raw text of large tables, kept small: one column as packed blocks of bytes, and rules per row as codes."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import overload

import numpy as np
from numpy.typing import NDArray

BLOCK_ROWS = 4096
LARGEST_MEMORY = 100_000  # different cells remembered while reading one column
_SEPARATOR = "\x1f"  # the control character "unit separator"; replaced by a blank where a cell contains it


class OddCell(str):
    """Cell of a workbook that holds no plain number or text; `fault` says what, `remedy` what to do."""

    __slots__ = ("fault", "remedy")
    fault: str
    remedy: str

    def __new__(cls, shown: str, fault: str, remedy: str) -> OddCell:
        """Make the cell from the text that is shown for it."""
        cell = super().__new__(cls, shown)
        cell.fault, cell.remedy = fault, remedy
        return cell


class TextColumn(Sequence[str]):
    """Text of one column, read like a sequence of str; about as large as the file it came from.

    Cells are packed in blocks. Reading in order of rows is cheap, also across many columns, since the
    last block that was unpacked is kept.
    """

    def __init__(self, cells: Sequence[str] = ()):
        self._blocks: list[bytes] = []
        self._length = 0
        self._odd: dict[int, OddCell] = {}
        self._last: tuple[int, list[str]] = (-1, [])
        for start in range(0, len(cells), BLOCK_ROWS):
            self.append_block(cells[start : start + BLOCK_ROWS])

    def append_block(self, cells: Sequence[str]) -> None:
        """Add up to `BLOCK_ROWS` cells; every block but the last one must be full."""
        text = _SEPARATOR.join(cells)
        if text.count(_SEPARATOR) >= len(cells):
            text = _SEPARATOR.join(cell.replace(_SEPARATOR, " ") for cell in cells)
        self._blocks.append(text.encode("utf-8", "surrogatepass"))
        self._length += len(cells)

    def mark_odd(self, row: int, cell: OddCell) -> None:
        """Remember that the cell in `row` is odd."""
        self._odd[row] = cell

    @property
    def odd(self) -> Mapping[int, OddCell]:
        """Odd cells by row index."""
        return self._odd

    def block(self, number: int) -> list[str]:
        """Cells of one block."""
        if self._last[0] != number:
            cells = self._blocks[number].decode("utf-8", "surrogatepass").split(_SEPARATOR)
            self._last = (number, cells)
        return self._last[1]

    def blocks(self) -> Iterator[tuple[int, list[str]]]:
        """First row index and cells of every block in turn."""
        for number in range(len(self._blocks)):
            yield number * BLOCK_ROWS, self.block(number)

    def __len__(self) -> int:
        return self._length

    @overload
    def __getitem__(self, index: int) -> str: ...
    @overload
    def __getitem__(self, index: slice) -> list[str]: ...
    def __getitem__(self, index: int | slice) -> str | list[str]:
        if isinstance(index, slice):
            return [self[i] for i in range(*index.indices(self._length))]
        position = index + self._length if index < 0 else index
        if not 0 <= position < self._length:
            raise IndexError(index)
        number, offset = divmod(int(position), BLOCK_ROWS)
        return self.block(number)[offset]

    def __iter__(self) -> Iterator[str]:
        for _, cells in self.blocks():
            yield from cells


class RowRules(Mapping[int, str]):
    """Rule in words for some rows of a column; rows share few texts, so only a code is kept per row."""

    def __init__(self, rows: int):
        self._codes: NDArray[np.int16] = np.zeros(rows, dtype=np.int16)
        self._texts: list[str] = [""]

    def set(self, mask: NDArray[np.bool_], text: str) -> None:
        """State the rule for the rows where `mask` is true."""
        if text not in self._texts:
            self._texts.append(text)
        self._codes[mask] = self._texts.index(text)

    def masks(self) -> Iterator[tuple[str, NDArray[np.bool_]]]:
        """Every rule with the rows it is for."""
        for code, text in enumerate(self._texts[1:], start=1):
            yield text, self._codes == code

    def __getitem__(self, row: int) -> str:
        code = int(self._codes[row])
        if code == 0:
            raise KeyError(row)
        return self._texts[code]

    def __iter__(self) -> Iterator[int]:
        return iter(np.flatnonzero(self._codes).tolist())

    def __len__(self) -> int:
        return int(np.count_nonzero(self._codes))
