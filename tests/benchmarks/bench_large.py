"""Large catalogs: reading 10 000 motors, and screening with matrix products, compiled loops, threads and processes.

Reading takes the demo's tables, repeated under new names. Screening holds every bound and twenty drives against
1e8 pairs by default; the compiled loops need the extra `fast`, and are loaded once before the clock starts.

Run: ``python tests/benchmarks/bench_large.py [million pairs]``. Goal: at least 3e8 pairs/s compiled on two cores, at
most 1 GiB, reading less than screening and evaluation together.
"""

import csv
import io
import os
import resource
import sys
import tempfile
import time
from importlib.util import find_spec
from pathlib import Path
from shutil import copytree

sys.path.insert(0, str(Path(__file__).parents[2]))
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

from actuator_sizing.case.reading import read_case  # noqa: E402
from actuator_sizing.sizing import screening  # noqa: E402
from actuator_sizing.sizing.comparison import compare  # noqa: E402
from actuator_sizing.sizing.demand import build_demand  # noqa: E402
from actuator_sizing.sizing.judging import active_checks, is_binding  # noqa: E402
from actuator_sizing.sizing.workplaces import local_processes, local_threads  # noqa: E402
from tests.benchmarks.bench_screening import big_case  # noqa: E402

DEMO = Path(__file__).parents[2] / "catalogs_demo"
MOTORS, GEARHEADS, DRIVES = 10_000, 1_000, 100


def repeated(table, count):
    """A demo catalog with so many rows, each under a name of its own."""
    rows = list(csv.reader(io.StringIO((DEMO / "catalog" / f"{table}.csv").read_text(encoding="utf-8-sig"))))
    head, body = rows[0], rows[1:]
    stream = io.StringIO()
    writer = csv.writer(stream)
    writer.writerow(head)
    for number in range(count):
        row = list(body[number % len(body)])
        row[0] += f"-{number}"
        writer.writerow(row)
    return stream.getvalue()


def read_and_compare():
    """Time the parts of a comparison of 1e9 sets."""
    with tempfile.TemporaryDirectory() as folder:
        case = Path(folder) / "case"
        copytree(DEMO / "tray_lift", case)
        (Path(folder) / "catalog").mkdir()
        for table, count in (("motors", MOTORS), ("gearheads", GEARHEADS), ("drives", DRIVES)):
            (Path(folder) / "catalog" / f"{table}.csv").write_text(repeated(table, count), encoding="utf-8")
        start = time.perf_counter()
        understood = read_case(case)
        read = time.perf_counter() - start
    began = {}
    start = time.perf_counter()
    compared = compare(
        understood, progress=lambda stage, _done: began.setdefault(stage, time.perf_counter() - start)
    )
    took = time.perf_counter() - start
    screened = began["evaluation"]
    print(
        f"{compared.rejections.sets_total:.3g} sets from tables: reading {read:.1f} s, screening about "
        f"{screened:.1f} s, evaluation of {compared.rejections.evaluated} sets and the rest {took - screened:.1f} s"
    )


def rate(made, executor=None):
    """Pairs a second of a whole screening."""
    checks, limits = active_checks(made.limits)
    binding = tuple(c for c, limit in zip(checks, limits, strict=True) if is_binding(c, limit))
    allowed = {c.key: made.limits[c.key].allowed_utilisation for c in binding}
    start = time.perf_counter()
    screening.screen(
        made, build_demand(made), binding, allowed, "price", keep=20_000, losers=40, executor=executor
    )
    took = time.perf_counter() - start
    return len(made.motor_parameters) * len(made.gearhead_parameters) / took


def main(millions):
    """Print one line for each way."""
    read_and_compare()
    made = big_case(int(millions * 1e6) // GEARHEADS, GEARHEADS, 20)
    screening._COMPILED_PAIRS = float("inf")
    print(f"matrix products, one process: {rate(made):.2g} pairs/s")
    with local_processes(2) as processes:
        print(f"matrix products, two processes: {rate(made, processes):.2g} pairs/s")
    if find_spec("numba") is not None:
        screening._COMPILED_PAIRS = 0.0
        rate(big_case(300, GEARHEADS, 20))
        print(f"compiled, one thread: {rate(made):.2g} pairs/s")
        with local_threads(2) as threads:
            print(f"compiled, two threads: {rate(made, threads):.2g} pairs/s")
    print(f"peak memory {resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024:.0f} MiB")


if __name__ == "__main__":
    main(float(sys.argv[1]) if len(sys.argv) > 1 else 100.0)
