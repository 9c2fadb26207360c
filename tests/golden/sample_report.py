"""The sample in ``reports/tray_lift``: how it is made, and with which packages.

After a change that moves numbers or looks, make it anew and look at it before it is committed::

    python -m tests.golden.sample_report
"""

import json
import platform
from datetime import date
from importlib.metadata import version
from pathlib import Path

import actuator_sizing as act
from actuator_sizing.files import replace_folder_files
from actuator_sizing.report import render_report

ROOT = Path(__file__).parents[2]
SAMPLE = ROOT / "reports" / "tray_lift"
MADE_WITH = Path(__file__).with_name("sample_made_with.json")
DAY = date(2026, 1, 5)
#: What is kept of the report; the list of candidates and the other figures would only weigh.
KEPT = (
    "sizing_report.html",
    "sizing_report.pdf",
    "sizing_tables.xlsx",
    "results.json",
    "figures/speed_torque.svg",
)


def render_sample() -> dict[str, bytes]:
    """Make the files of the sample."""
    comparison = act.compare(act.read_case(ROOT / "catalogs_demo" / "tray_lift"))
    files = render_report(comparison, date=DAY, pdf=True)
    return {name: files[name] for name in KEPT}


def packages() -> dict[str, str]:
    """What decides the bytes: versions of the packages that draw, typeset and compute, and the machine."""
    names = ("matplotlib", "numpy", "scipy", "pandas", "XlsxWriter", "Jinja2", "typst")
    return {"machine": platform.machine(), "system": platform.system()} | {
        name: version(name) for name in names
    }


if __name__ == "__main__":
    written = replace_folder_files(SAMPLE, render_sample())
    MADE_WITH.write_text(json.dumps(packages(), indent=1) + "\n", encoding="utf-8")
    print("\n".join(str(path.relative_to(ROOT)) for path in written))
