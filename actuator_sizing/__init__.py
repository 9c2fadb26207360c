"""Choose the motor, gearhead, drive and supply of a motion axis, and defend the choice.

Examples
--------
::

    import actuator_sizing as act

    case = act.read_case("catalogs_demo/tray_lift")
    comparison = act.compare(case)
    comparison.best.checks
    comparison.write_report("reports/tray_lift")
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

from actuator_sizing.version import __version__

if TYPE_CHECKING:
    from actuator_sizing.case.audit import audit_case
    from actuator_sizing.case.converting import convert_case
    from actuator_sizing.case.reading import check_case, read_case
    from actuator_sizing.case.starting import start_case
    from actuator_sizing.report.revision import read_results
    from actuator_sizing.sizing import compare
    from actuator_sizing.sizing.headroom import headroom
    from actuator_sizing.sizing.machine import compare_machine
    from actuator_sizing.sizing.robustness.robust import robust
    from actuator_sizing.sizing.simulation import simulate

__all__ = [
    "__version__",
    "audit_case",
    "check_case",
    "compare",
    "compare_machine",
    "convert_case",
    "headroom",
    "read_case",
    "read_results",
    "robust",
    "simulate",
    "start_case",
]

# Where each public name lives. They are imported on first use, so that `import actuator_sizing` and the
# help page of the command line stay fast.
_HOMES = {
    "audit_case": "actuator_sizing.case.audit",
    "check_case": "actuator_sizing.case.reading",
    "compare": "actuator_sizing.sizing",
    "compare_machine": "actuator_sizing.sizing.machine",
    "convert_case": "actuator_sizing.case.converting",
    "headroom": "actuator_sizing.sizing.headroom",
    "read_case": "actuator_sizing.case.reading",
    "read_results": "actuator_sizing.report.revision",
    "robust": "actuator_sizing.sizing.robustness.robust",
    "simulate": "actuator_sizing.sizing.simulation",
    "start_case": "actuator_sizing.case.starting",
}


def __getattr__(name: str) -> Any:
    if name in _HOMES:
        value = getattr(import_module(_HOMES[name]), name)
        globals()[name] = value
        return value
    raise AttributeError(f"module '{__name__}' has no attribute '{name}'")


def __dir__() -> list[str]:
    return sorted(set(globals()) | set(__all__))
