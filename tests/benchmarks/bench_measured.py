"""A measured cycle of 10⁴, 10⁵ and 10⁶ samples, sized in a process of its own, and the time of screening alone.

``python tests/benchmarks/bench_measured.py``

The record is the demo case `tray_shuttle_measured` sampled anew with noise, three columns, unevenly spaced. A
process reads the case, sizes it and prints results.json (`compare --json`: everything but the report). Screening
has the condensed demand and cannot know how long the record was.
"""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np

DEMO = Path(__file__).parents[2] / "catalogs_demo"
ROUNDS = 3

_SIZED = """
import json, resource, sys
from actuator_sizing.cli import main
sys.argv = ["actuator-sizing", "compare", sys.argv[1], "--json"]
try:
    main()
except SystemExit as stop:
    used = resource.getrusage(resource.RUSAGE_SELF)
    figures = [stop.code or 0, used.ru_utime + used.ru_stime, used.ru_maxrss / 1024]
    print(json.dumps(figures), file=sys.stderr)
"""


def long_record(folder: Path, count: int) -> Path:
    """The demo case with `count` samples."""
    demo = DEMO / "tray_shuttle_measured"
    shutil.copytree(demo, folder)
    axis = (folder / "axis.csv").read_text("utf-8-sig")
    (folder / "axis.csv").write_text(axis.replace("../catalog", str(DEMO / "catalog")), "utf-8")
    heading, *rows = (demo / "measured.csv").read_text("utf-8-sig").splitlines()
    known = np.array([[float(cell.replace(",", ".")) for cell in row.split(";")] for row in rows]).T
    draw = np.random.default_rng(1)
    span = known[0, -1]
    t = np.sort(np.linspace(0.0, span, count) + draw.uniform(-0.3, 0.3, count) * span / count)
    columns = [np.interp(t, known[0], values) + draw.normal(0.0, noise, count)
               for values, noise in zip(known[1:], (0.02, 1.0), strict=True)]  # fmt: skip
    np.savetxt(folder / "measured.csv", np.stack([t - t[0], *columns], axis=1), delimiter=",", comments="",
               fmt=["%.9f", "%.4f", "%.4f"], header=heading.replace(";", ","))  # fmt: skip
    return folder


def sized(case: Path) -> tuple[float, float, float]:
    """Wall time [s], processor time [s] and largest memory [MiB] of one process."""
    start = time.perf_counter()
    done = subprocess.run([sys.executable, "-c", _SIZED, str(case)], capture_output=True, text=True, check=True,
                          env={**os.environ, "OMP_NUM_THREADS": "1"})  # fmt: skip
    status, processor, memory = json.loads(done.stderr.splitlines()[-1])
    assert status in (0, 1), "not sized"
    return time.perf_counter() - start, processor, memory


def screening(case_path: Path) -> tuple[float, int]:
    """Processor time of screening alone [s], and pieces of the demand."""
    from actuator_sizing.case.reading import read_case
    from actuator_sizing.sizing.demand import build_demand
    from actuator_sizing.sizing.judging import active_checks, is_binding
    from actuator_sizing.sizing.screening import screen

    case = read_case(case_path)
    demand = build_demand(case)
    checks, limits = active_checks(case.limits)
    binding = tuple(c for c, limit in zip(checks, limits, strict=True) if is_binding(c, limit))
    allowed = {c.key: case.limits[c.key].allowed_utilisation for c in binding}
    best = np.inf
    for _ in range(ROUNDS):
        start = time.process_time()
        screen(case, demand, binding, allowed, "price", keep=1000, losers=40)
        best = min(best, time.process_time() - start)
    return best, len(demand.duration_s)


def main() -> None:
    """Print one line per length."""
    print(f"load of the machine: {os.getloadavg()[0]:.1f}")
    print("  samples   wall s  processor s  memory MiB  screening s  pieces")
    with tempfile.TemporaryDirectory() as folder:
        for count in (10_000, 100_000, 1_000_000):
            case = long_record(Path(folder) / str(count), count)
            runs = np.array([sized(case) for _ in range(ROUNDS)])
            alone, pieces = screening(case)
            wall, processor, memory = runs[:, 0].min(), runs[:, 1].min(), runs[:, 2].max()
            print(f"{count:9d} {wall:8.2f} {processor:12.2f} {memory:11.0f} {alone:12.3f} {pieces:7d}")


if __name__ == "__main__":
    main()
