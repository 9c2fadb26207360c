"""How long the demo cases take: reading, comparing all sets, making the report; and the help page.

Run with ``python tests/benchmarks/bench_chain.py``; prints the best of five.
"""

import subprocess
import sys
import time
from pathlib import Path

import actuator_sizing as act
from actuator_sizing.report import render_report

ROUNDS = 5
DEMO = Path(__file__).parents[2] / "catalogs_demo"
CASES = ("tray_lift", "tray_shuttle", "potting_table")


def once(path):
    start = time.perf_counter()
    case = act.read_case(path)
    read = time.perf_counter()
    comparison = act.compare(case)
    compared = time.perf_counter()
    render_report(comparison)
    return comparison.rejections.sets_total, read - start, compared - read, time.perf_counter() - compared


def help_page():
    start = time.perf_counter()
    subprocess.run([sys.executable, "-m", "actuator_sizing", "--help"], check=True, stdout=subprocess.DEVNULL)
    return time.perf_counter() - start


def main():
    print("case             sets    read [s]  compare [s]  report [s]")
    for name in CASES:
        rounds = [once(DEMO / name) for _ in range(ROUNDS)]
        read, compare, report = (min(each[at] for each in rounds) for at in (1, 2, 3))
        print(f"{name:<14} {rounds[0][0]:>6}  {read:10.3f} {compare:12.3f} {report:11.3f}")
    print(f"help page [s]: {min(help_page() for _ in range(ROUNDS)):.3f}")


if __name__ == "__main__":
    main()
