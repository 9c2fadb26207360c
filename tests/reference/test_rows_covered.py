"""How many of the published rows are held against the package; keeps the number from shrinking unseen."""

import ast
import re
from pathlib import Path

FOLDER = Path(__file__).parent
LEAST_ROWS = 90  # raise it with every row added; a row leaves only with a reason in the commit
ROW = re.compile(r"A(\d{1,2})\.(\d{1,2})")


def marked_rows():
    """Rows by test, read from the marks in the source, so that a partial run counts the same."""
    rows = {}
    for path in sorted(FOLDER.glob("test_*.py")):
        for node in ast.parse(path.read_text(encoding="utf-8")).body:
            if not isinstance(node, ast.FunctionDef):
                continue
            for mark in node.decorator_list:
                if isinstance(mark, ast.Call) and ast.unparse(mark.func) == "pytest.mark.published":
                    rows[f"{path.name}::{node.name}"] = [ast.literal_eval(row) for row in mark.args]
    return rows


def test_every_mark_names_rows():
    for test, rows in marked_rows().items():
        assert rows, test
        for row in rows:
            match = ROW.fullmatch(row)
            assert match, (test, row)
            assert 1 <= int(match[1]) <= 12, (test, row)


def test_enough_rows_are_covered():
    distinct = {row for rows in marked_rows().values() for row in rows}
    assert len(distinct) >= LEAST_ROWS, f"only {len(distinct)} published rows are covered"
