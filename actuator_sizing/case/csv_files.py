"""CSV files as Europe and America export them: comma, semicolon or tab; decimal point or comma."""

from __future__ import annotations

import codecs
import csv
import io
import re
from collections.abc import Iterator
from pathlib import Path

from actuator_sizing.case.cells import COMMA, POINT
from actuator_sizing.case.problem_list import ProblemList, shown
from actuator_sizing.case.raw_tables import MAX_COLUMNS, MAX_ROWS, RawTable, TableBuilder
from actuator_sizing.errors import NOTE

MAX_FILE_BYTES = 400_000_000
_DELIMITERS = ";\t,"
_LONGEST_CELL = 32_767  # the cell limit of spreadsheets
_BOMS = (
    (codecs.BOM_UTF8, "utf-8-sig"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)
_QUOTED_OR_BRACKETED = re.compile(r'"[^"]*"|\[[^\]]*\]')
_SEPARATOR_LINE = re.compile(rb'"?sep=(.)"?\r?\n', re.IGNORECASE)


def read_csv(path: Path, name: str, known: frozenset[str], problems: ProblemList) -> RawTable | None:
    """Read one CSV file.

    Parameters
    ----------
    path : Path
        File to read.
    name : str
        Table it holds.
    known : frozenset of str
        Folded names of known columns; the delimiter is the one that makes most headings known.
    problems : ProblemList
        Takes what is wrong with the file.

    Returns
    -------
    RawTable or None
        None where the file could not be read at all; the problem says why.
    """
    data = _read_bytes(path, problems)
    if data is None:
        return None
    decoded = _decode(data, path.name, problems)
    if decoded is None:
        return None
    data, encoding = decoded
    announced = _SEPARATOR_LINE.match(data)
    delimiter = announced.group(1).decode("ascii", "replace") if announced else ""
    if announced:
        data = data[announced.end() :]
    text_of_head = data[:200_000].decode(encoding, "replace")
    if delimiter not in tuple(_DELIMITERS):
        delimiter = _delimiter(text_of_head, known)
    decimal = _decimal(data, delimiter)
    stream = io.TextIOWrapper(io.BytesIO(data), encoding=encoding, newline="")
    records = csv.reader(stream, delimiter=delimiter, strict=True)
    try:
        return _build(records, name, path.name, delimiter, decimal, problems)
    except csv.Error as error:
        problems.report(
            path.name,
            None,
            got=f"text line {records.line_num}: {error}",
            allowed="fields separated by one character, quotes in pairs",
            remedy="Look for a quote that is opened and not closed, or save the table as CSV again.",
        )
        return None


def _read_bytes(path: Path, problems: ProblemList) -> bytes | None:
    try:
        size = path.stat().st_size
        if size > MAX_FILE_BYTES:
            problems.report(path.name, got=f"{size / 1e6:.0f} MB",
                            allowed=f"at most {MAX_FILE_BYTES / 1e6:.0f} MB",
                            remedy="Split the table, or leave out columns that are not needed.")  # fmt: skip
            return None
        return path.read_bytes()
    except OSError as error:
        problems.report(path.name, got=error.strerror or str(error), allowed="a file that can be read",
                        remedy="Check that the file exists and that you may read it.")  # fmt: skip
        return None


def _decode(data: bytes, file: str, problems: ProblemList) -> tuple[bytes, str] | None:
    """Bytes without BOM and the encoding they are in."""
    for bom, encoding in _BOMS:
        if data.startswith(bom):
            try:
                return data.decode(encoding).encode("utf-8", "surrogatepass"), "utf-8"
            except UnicodeDecodeError:
                break
    if b"\0" in data:
        problems.report(file, got="a binary file", allowed="text separated by comma, semicolon or tab",
                        remedy="Save the table as CSV (UTF-8).")  # fmt: skip
        return None
    try:
        data.decode("utf-8")
        return data, "utf-8"
    except UnicodeDecodeError as error:
        try:
            data.decode("cp1252")
        except UnicodeDecodeError:
            problems.report(file, got=f"byte {error.start + 1} is not UTF-8", allowed="text in UTF-8",
                            remedy="Save the table as CSV (UTF-8).")  # fmt: skip
            return None
        problems.report(file, got="text that is not UTF-8", allowed="UTF-8",
                        remedy="It was read as Windows-1252 (Western European); check special letters.",
                        severity=NOTE)  # fmt: skip
        return data, "cp1252"


def _delimiter(text: str, known: frozenset[str]) -> str:
    """Delimiter that makes most headings known; among equals the most frequent one."""
    from actuator_sizing.case.headings import split_heading

    line = next((line for line in text.splitlines() if line.strip(" \t;,\"'")), "")
    bare = _QUOTED_OR_BRACKETED.sub("", line)

    def score(delimiter: str) -> tuple[int, int]:
        cells = next(csv.reader([line], delimiter=delimiter), [])
        recognised = sum(split_heading(cell)[0] in known for cell in cells)
        return recognised, bare.count(delimiter)

    return max(_DELIMITERS, key=score if line else text.count)


def _decimal(data: bytes, delimiter: str) -> str:
    """Decimal mark that some cell of the file proves; a semicolon between fields suggests the comma."""
    edge = re.escape(delimiter).encode()
    start, end = b'(?:^|"|' + edge + b")[ ]*[-+]?", b'[ ]*(?:"|' + edge + b"|\r|\n|$)"
    digits = rb"(?:0|[1-9]\d*|)%s(?:\d{1,2}|\d{4,})"
    zero = rb"0%s\d+"
    found = {}
    for mark in (COMMA, POINT):
        escaped = re.escape(mark).encode()
        if mark == delimiter:
            pattern = b'"[ ]*[-+]?(?:' + (digits % escaped) + b"|" + (zero % escaped) + b')[ ]*"'
        else:
            pattern = start + b"(?:" + (digits % escaped) + b"|" + (zero % escaped) + b")" + end
        found[mark] = re.search(pattern, data, re.MULTILINE) is not None if mark.encode() in data else False
    if found[COMMA] != found[POINT]:
        return COMMA if found[COMMA] else POINT
    if found[COMMA]:
        return ""  # both occur: a cell that could be either is reported
    return COMMA if delimiter == ";" and b"." not in data else ""


def _build(
    records: Iterator[list[str]],
    name: str,
    file: str,
    delimiter: str,
    decimal: str,
    problems: ProblemList,
) -> RawTable | None:
    headings: list[str] = []
    numbered = enumerate(records, start=1)
    for _, record in numbered:
        if any(cell.strip() for cell in record):
            headings = [cell.strip() for cell in record]
            break
    while headings and not headings[-1]:
        headings.pop()
    if not headings or len(headings) > MAX_COLUMNS:
        problems.report(
            file,
            None,
            got=f"{len(headings)} columns" if headings else "an empty file",
            allowed=f"a heading row with 1 to {MAX_COLUMNS} columns",
            remedy="Write the column names in the first row.",
        )
        return None
    builder = TableBuilder(headings)
    width = len(headings)
    for number, record in numbered:
        if number > MAX_ROWS:
            problems.report(file, None, got=f"more than {MAX_ROWS} rows", allowed=f"at most {MAX_ROWS} rows",
                            remedy="Split the table.")  # fmt: skip
            return None
        if len(record) != width:
            record = _fit(record, width, number, name, delimiter, problems)
        if any(record) and any(cell.strip() for cell in record):
            builder.add(number, record)
            longest = max(map(len, record))
            if longest > _LONGEST_CELL:
                problems.report(name, number, got=f"a cell of {longest} characters",
                                allowed=f"at most {_LONGEST_CELL} characters",
                                remedy="Shorten the text; look for a quote that is not closed.")  # fmt: skip
    return builder.finish(name, file, decimal)


def _fit(
    record: list[str], width: int, number: int, name: str, delimiter: str, problems: ProblemList
) -> list[str]:
    """Row with exactly one cell per heading."""
    extra = [cell for cell in record[width:] if cell.strip()]
    if extra:
        hint = " A decimal comma inside a comma-separated file needs quotes." if delimiter == COMMA else ""
        problems.report(
            name,
            number,
            got=f"{len(record)} cells, the last {shown(extra[-1])}",
            allowed=f"{width} cells, one for each heading",
            remedy=f"Remove the extra cells or give them a heading.{hint}",
        )
    return (record + [""] * width)[:width]
