"""The page names the levers that do not help in one line per set, and gives rows only to those that do."""

from __future__ import annotations

from types import SimpleNamespace

import pytest

from actuator_sizing.report.document import levers
from actuator_sizing.report.document.blocks import Paragraph, Table


def lever(title, needed):
    return {"lever": "part", "title": title, "present": "one", "needed": needed, "next_step": None,
            "ordered_by": "price", "helps": needed is not None}  # fmt: skip


@pytest.mark.parametrize("needed", ["two", None])
def test_levers_without_help_share_one_line(monkeypatch, needed):
    monkeypatch.setattr(levers, "_caption", lambda item: "the set")
    item = SimpleNamespace(levers=[lever("Motor", None), lever("Drive", None), lever("Gearhead", needed)])
    section = levers.levers_section(SimpleNamespace(case=None, sets=[item]))
    tables = [block for block in section.blocks if isinstance(block, Table)]
    assert [len(table.rows) for table in tables] == ([1] if needed else [])
    idle = [
        block.text
        for block in section.blocks
        if isinstance(block, Paragraph) and "alone helps:" in block.text
    ]
    assert len(idle) == 1
    assert "Motor; Drive" in idle[0]
