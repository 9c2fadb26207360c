"""What was not checked, what to ask, what to measure, what to beware of, and who signs."""

from __future__ import annotations

from typing import TYPE_CHECKING

from actuator_sizing.report.document.blocks import Bullets, Column, Paragraph, Section, SignOff, Table, row
from actuator_sizing.report.formatting import quantity
from actuator_sizing.report.text import clean, option
from actuator_sizing.sizing.results import NOT_CHECKED

if TYPE_CHECKING:
    from actuator_sizing.report.document.blocks import Block
    from actuator_sizing.sizing.results import Comparison

_WINDING = "sensor or resistance, motor at ambient before"
_HOUSING = "surface sensor, motor at ambient before"
#: Quantity, what to measure, SI unit, how
_COMMISSIONING = (
    ("current_rms_a", "RMS motor current over one cycle", "A", "drive trace, cycle repeated until warm"),
    ("current_peak_a", "peak motor current", "A", "drive trace, full payload"),
    ("torque_peak_nm", "peak torque (air gap)", "N·m", "peak current times torque constant"),
    ("speed_peak_rad_s", "peak motor speed", "rad/s", "drive trace"),
    ("voltage_peak_v", "peak motor voltage (model voltage, motor's basis)", "V", "drive trace, lowest bus"),
    ("bus_voltage_max_v", "highest bus voltage", "V", "while braking from the highest speed"),
    ("bus_voltage_min_v", "lowest bus voltage", "V", "while accelerating at full payload"),
    ("brake_energy_per_cycle_j", "energy into the brake resistor per cycle", "J", "chopper duty, full speed"),
    ("winding_after_10_min_degc", "winding, 10 min after a start from cold", "°C", _WINDING),
    ("winding_after_30_min_degc", "winding, 30 min after a start from cold", "°C", _WINDING),
    ("winding_after_60_min_degc", "winding, 60 min after a start from cold", "°C", _WINDING),
    ("winding_max_degc", "winding in the periodic state", "°C", "sensor or resistance, after warm-up"),
    ("housing_after_10_min_degc", "housing, 10 min after a start from cold", "°C", _HOUSING),
    ("housing_after_30_min_degc", "housing, 30 min after a start from cold", "°C", _HOUSING),
    ("housing_after_60_min_degc", "housing, 60 min after a start from cold", "°C", _HOUSING),
    ("housing_max_degc", "housing in the periodic state", "°C", "surface sensor, after warm-up"),
    ("following_error_max_m", "largest following error", "m", "drive trace, tuned loops"),
    ("following_error_max_rad", "largest following error", "rad", "drive trace, tuned loops"),
)
#: What is measured though nothing predicts it; one of the names known is enough.
_UNPREDICTED = (
    (("bus_voltage_max_v",), "highest bus voltage", "drive trace while braking from the highest speed"),
    (("bus_voltage_min_v",), "lowest bus voltage", "drive trace while accelerating at full payload"),
    (
        ("following_error_max_m", "following_error_max_rad"),
        "largest following error",
        "drive trace, tuned loops",
    ),
)

_OUTSIDE = (
    "noise, vibration and cleanliness",
    "electromagnetic compatibility, cables, protection and isolation",
    "explosive atmospheres, hygiene, radiation and earthquake",
    "strength and life of shafts, keys, guides and frames",
    "tuning and stability of the control loops on the real machine",
)

_CAUTIONS = (
    "This report is an engineering aid and certifies nothing. It is only as good as the data entered. A "
    "competent engineer, licensed where the law asks for it, has to verify it; machinery law and "
    "electrical codes of the place of use apply.",
    "Risk assessment (ISO 12100) and the design of safety functions (ISO 13849-1, IEC 62061) are outside "
    "this report. No computed stop, holding torque or temperature in it is a protective measure.",
    "On an axis with gravity the load moves when torque is removed, also by safe torque off (IEC "
    "61800-5-2). The holding brake of a motor is a parking brake. Persons under a raised load need "
    "further measures. Self-locking of a screw or worm is no safety function.",
    "Stopping times and distances follow from computation. Measure them on the machine with the worst "
    "load before guards and protective devices are placed (ISO 13855).",
    "Safe torque off does not isolate. The DC bus stays charged for minutes after switching off, and a "
    "permanent-magnet motor that is turned from outside generates voltage.",
    "Motor, drive and brake-resistor surfaces can burn skin; compare the temperatures with ISO 13732-1, "
    "which informs and sets no limits. A brake resistor can start a fire: protect it against overload "
    "and keep it clear.",
    "Before a battery or a supply is chosen, make sure that it accepts the returned energy, and size "
    "fuses and wiring for its short-circuit current.",
    "Put the axis into service with reduced limits of current and speed. Verify direction of motion, brake "
    "sequence, emergency stop and end of travel first, then compare with the predicted values.",
)


def not_checked_section(comparison: Comparison) -> Section:
    """Say what was not checked, why, and what to ask the supplier."""
    blocks: list[Block] = []
    missing = []
    if comparison.sets:
        missing = [c for c in comparison.sets[0].checks if c.verdict == NOT_CHECKED]
    if missing:
        blocks.append(
            Table(
                "Checks of the leading set that could not be made",
                (Column("Check not made", weight=1.5), Column("Data that is missing", weight=3.0)),
                tuple(row(c.title, ", ".join(map(clean, c.missing)) or "not stated") for c in missing),
            )
        )
    else:
        blocks.append(
            Paragraph(
                "Every check of this list that concerns the leading set was made. The assumptions say what no "
                "check of this tool judges."
            )
        )
    if comparison.questions:
        columns = (
            Column("Part", weight=1.2),
            Column("Please state", weight=2.0),
            Column("Needed for", weight=2.0),
        )
        rows = tuple(row(*(clean(text) for text in question)) for question in comparison.questions)
        blocks.append(Table("Questions to the supplier", columns, rows))
    blocks.append(Paragraph("Outside this report, for every set:"))
    blocks.append(Bullets(_OUTSIDE))
    return Section("not_checked", "What was not checked", tuple(blocks))


def commissioning_section(comparison: Comparison) -> Section:
    """List what to measure when the axis is put into service, with the predicted value beside a blank."""
    quantities = comparison.sets[0].quantities
    linear_motor = bool(comparison.case.mechanism.drives_linear_motor)
    linear = {"N·m": "N", "rad/s": "m/s"}
    rows = []
    for key, what, unit, how in _COMMISSIONING:
        value = quantities.get(key)
        if value is None or value != value:
            continue
        label = linear.get(unit, unit) if linear_motor else unit
        text = quantity(float(value), label)
        if label == "A" and quantities.get("current_basis"):
            text += f" {quantities['current_basis']}"
        rows.append(row(what, text, how, ""))
    around = comparison.case.surroundings
    limits = {
        "bus_voltage_min_v": f"not predicted; {quantity(around.bus_min_v, 'V')} is the least allowed for",
        "bus_voltage_max_v": f"not predicted; {quantity(around.bus_max_v, 'V')} is the most allowed for",
    }
    for keys, what, how in _UNPREDICTED:
        if all(quantities.get(key) is None for key in keys):
            rows.append(row(what, limits.get(keys[0], "not predicted"), how, ""))
    columns = (
        Column("Measure", weight=2.4),
        Column("Predicted", weight=1.9),
        Column("How", weight=2.4),
        Column("Measured, date, initials", weight=1.6),
    )
    note = Paragraph(
        f"Ambient of the prediction: {quantity(around.ambient_degc, '°C')}; a machine in another ambient reads "
        "about as much higher or lower. A measured value that differs by more than its tolerance is a reason "
        "to review the inputs, friction and payload first."
    )
    return Section(
        "commissioning",
        "Values to confirm at commissioning",
        (Table("Predicted and measured", columns, tuple(rows)), note),
    )


def cautions_section() -> Section:
    """Print what every report has to say."""
    return Section("cautions", "Cautions", (Bullets(_CAUTIONS),))


def sign_off_section(comparison: Comparison) -> Section:
    """Leave lines to sign."""
    roles = (
        ("Prepared by", option(comparison.case, "prepared by")),
        ("Checked by", ""),
        ("Approved by", ""),
    )
    return Section("sign_off", "Sign-off", (SignOff(roles),))
