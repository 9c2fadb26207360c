"""How long the writers take for a demo case, all together and one by one, and how large the files are.

Run with ``python tests/benchmarks/bench_report.py [case]``; prints the best of three by the clock and by the
processor, and what every file weighs. Aim: page, PDF, workbook, results, candidates and figures within 2 s.
"""

import sys
import time
from collections.abc import Callable
from datetime import date
from pathlib import Path

import actuator_sizing as act
from actuator_sizing.report import render_report
from actuator_sizing.report.candidates_csv import render_candidates
from actuator_sizing.report.document import prepare_document
from actuator_sizing.report.figures import draw_figures
from actuator_sizing.report.html import render_html
from actuator_sizing.report.json_results import render_json
from actuator_sizing.report.pdf import can_write_pdf, render_pdf
from actuator_sizing.report.workbook import render_workbook

ROUNDS = 3
DEMO = Path(__file__).parents[2] / "catalogs_demo"
DAY = date(2025, 3, 4)


def best(work: Callable[[], object]) -> tuple[float, float]:
    """Shortest time of a few rounds, by the clock and by the processor."""
    rounds = []
    for _ in range(ROUNDS):
        clock, processor = time.perf_counter(), time.process_time()
        work()
        rounds.append((time.perf_counter() - clock, time.process_time() - processor))
    return min(clock for clock, _ in rounds), min(processor for _, processor in rounds)


def measure(name: str) -> None:
    """Print the times of one demo case."""
    comparison = act.compare(act.read_case(DEMO / name))
    clock, processor = time.perf_counter(), time.process_time()
    files = render_report(comparison, date=DAY)
    first = time.perf_counter() - clock, time.process_time() - processor
    figures = draw_figures(comparison)
    document = prepare_document(comparison, DAY, figures)
    writers: dict[str, Callable[[], object]] = {
        "all writers": lambda: render_report(comparison, date=DAY),
        "  figures": lambda: draw_figures(comparison),
        "  document": lambda: prepare_document(comparison, DAY, figures),
        "  page": lambda: render_html(document, figures),
        "  workbook": lambda: render_workbook(comparison, DAY),
        "  results": lambda: render_json(comparison),
        "  candidates": lambda: render_candidates(comparison),
    }
    if can_write_pdf():
        writers["  PDF"] = lambda: render_pdf(document, figures)
    print(f"{name}: {sum(map(len, files.values())) / 1e6:.2f} MB, {len(comparison.candidates)} candidates")
    print(f"{'':<14} clock [s]  processor [s]")
    print(f"{'first time':<14} {first[0]:9.3f} {first[1]:14.3f}")
    for label, work in writers.items():
        print(f"{label:<14} {best(work)[0]:9.3f} {best(work)[1]:14.3f}")


if __name__ == "__main__":
    for case in sys.argv[1:] or ["tray_lift", "tray_shuttle", "potting_table"]:
        measure(case)
