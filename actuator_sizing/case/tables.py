"""Every table, column and word of a case, declared once.

The reader, the template writer, the audit and the documentation of columns all read these declarations.
Catalog columns are declared in `catalog_columns`; bounds are SI.
"""

from __future__ import annotations

from dataclasses import replace

from actuator_sizing.case.catalog_columns import DRIVE_COLUMNS, GEARHEAD_COLUMNS, MOTOR_COLUMNS
from actuator_sizing.case.check_names import (
    CHECK_NAMES,
    DEFAULT_ALLOWED_UTILISATION,
    DEFAULT_RECOMMENDED_RESERVE,
)
from actuator_sizing.case.columns import (
    TEXT,
    UNITLESS_KINDS,
    WORDS,
    YES_NO,
    Column,
    Table,
    find,
    fold,
    key_of,
    nearest,
)
from actuator_sizing.case.cycle_columns import CYCLES_COLUMNS, DUTY_TYPE_COLUMNS
from actuator_sizing.case.strength_columns import MECHANISM_STRENGTH, STRENGTH_QUANTITIES
from actuator_sizing.core.mechanisms import (
    LINEAR,
    LOAD,
    MECHANISMS,
    ROTARY,
    SHAFT,
    Mechanism,
    Parameter,
)

RANKINGS = ("price", "mass", "reserve", "energy")
ABSOLUTE_ZERO_DEGC = -273.15

LAW_WORDS = (
    "trapezoid",
    "triangular",
    "jerk-limited",
    "3-4-5 polynomial",
    "4-5-6-7 polynomial",
    "cycloidal",
    "modified sine",
    "modified trapezoid",
    "simple harmonic",
    "sinusoid",
    "spline",
    "constant speed",
    "speed ramp",
    "dwell",
)

# -- axis: one quantity per row ---------------------------------------------------------------------------

AXIS_COLUMNS = (
    Column("quantity", TEXT, "name of the quantity", required=True, example="moving mass"),
    Column("value", TEXT, "number or word", required=True, example="18"),
    Column("unit", TEXT, "unit of the number; empty for words and plain numbers", example="kg"),
    Column("source", TEXT, "where the value comes from: drawing, measurement, standard", example="drawing"),
)

COMMON_QUANTITIES = (
    Column("mechanism", WORDS, "what carries the load from the driven shaft", required=True,
           words=tuple(MECHANISMS), example="ball screw"),
    Column("motion stated at", WORDS, "whether the duty cycle states the motion of the load or of the driven "
           "shaft (default: the load; the shaft for cranks, cams and linkages)", words=(LOAD, SHAFT), example=""),
    Column("title", TEXT, "name of the axis as printed on the report", example="Tray lift"),
    Column("revision", TEXT, "revision of this specification", example="A"),
    Column("prepared by", TEXT, "who stands behind the numbers", example=""),
    Column("ambient temperature", "temperature", "air around the motor, in the hottest room", default=40.0,
           assumed="40 °C, the usual reference site", minimum=-60.0, maximum=200.0, example="40", unit="°C"),
    Column("lowest ambient temperature", "temperature", "air around the motor on the coldest day: cold magnets "
           "need more voltage (default: the ambient temperature)", minimum=-60.0, maximum=200.0, example="",
           unit="°C"),
    Column("altitude", "length", "height above sea level; cooling weakens above 1000 m", default=0.0,
           assumed="at or below 1000 m", minimum=-500.0, maximum=9000.0, example="200", unit="m"),
    Column("nominal bus voltage", "voltage", "DC bus voltage as planned", required=True, positive=True,
           maximum=1.0e5, example="320", unit="V"),
    Column("minimum bus voltage", "voltage", "lowest DC bus voltage under load", positive=True, maximum=1.0e5,
           assumed="nominal bus voltage −10 %", example="288", unit="V"),
    Column("maximum bus voltage", "voltage", "highest DC bus voltage from the supply", positive=True,
           maximum=1.0e5, assumed="nominal bus voltage +10 %", example="352", unit="V"),
    Column("modulation limit", "ratio", "largest line-to-line peak voltage over bus voltage", default=0.95,
           assumed="linear range with a reserve for control", positive=True, maximum=1.2, example="95",
           unit="%"),
    Column("judged winding temperature", "temperature", "winding temperature at which voltage and peak "
           "torque "
           "are judged (default: the winding limit of each motor)", minimum=-60.0, maximum=400.0, example="",
           unit="°C"),
    Column("current loop rise time", "time", "time in which the drive can change the current at a step of "
           "acceleration", default=1.0e-3, assumed="common for a digital current loop", positive=True,
           maximum=10.0, example="1", unit="ms"),
    Column("supply", WORDS, "what feeds the bus: mains through a rectifier, a DC supply, or a battery, which also "
           "takes regenerated energy", words=("rectified mains", "DC supply", "battery"), default="rectified mains",
           assumed="usual for a drive with its own rectifier", example=""),
    Column("bus capacitance", "capacitance", "capacitance on the DC bus besides the drive's own", minimum=0.0,
           example="680", unit="µF"),
    Column("chopper threshold", "voltage", "bus voltage at which the brake chopper switches on",
           positive=True,
           example="385", unit="V"),
    Column("chopper hysteresis", "voltage", "how far below its threshold the brake chopper switches off again",
           minimum=0.0, maximum=1.0e4, example="", unit="V"),
    Column("brake resistor", "resistance", "resistance of the brake resistor", positive=True, example="40",
           unit="Ω"),
    Column("brake resistor continuous power", "power", "power the brake resistor stands for ever", positive=True,
           maximum=1.0e7, example="150", unit="W"),
    Column("brake resistor pulse energy", "energy", "energy the brake resistor takes in one pulse, hot",
           positive=True, maximum=1.0e9, example="2", unit="kJ"),
    Column("supply continuous power", "power", "power the supply gives for ever", positive=True, maximum=1.0e9,
           example="", unit="kW"),
    Column("supply peak power", "power", "largest power the supply gives", positive=True, maximum=1.0e9,
           example="", unit="kW"),
    Column("supply internal resistance", "resistance", "resistance of supply and leads; the minimum bus voltage "
           "is then the one without load", positive=True, maximum=1.0e6, example="", unit="Ω"),
    Column("motor cable length", "length", "length of the cable between drive and motor; its resistance takes "
           "voltage and adds loss", positive=True, maximum=1.0e4, example="", unit="m"),
    Column("motor cable cross-section", "area", "cross-section of one conductor of that cable", positive=True,
           maximum=1.0e-2, example="", unit="mm²"),
    Column("supply current limit", "current", "largest current the supply gives; beyond it only the capacitors "
           "help", positive=True, maximum=1.0e6, example="", unit="A"),
    Column("supply charging current", "current", "largest current that a battery, or a supply that feeds back, "
           "takes", positive=True, maximum=1.0e6, example="", unit="A"),
    Column("other power on the bus", "power", "what other loads take from the bus all the time", minimum=0.0,
           maximum=1.0e9, example="", unit="W"),
    Column("supply feeds back", YES_NO, "whether the supply returns regenerated energy to the mains",
           default="no", assumed="a rectifier does not feed back", example="no"),
    Column("stop reaction time", "time", "from the event that asks for a stop until the drive or the brake is told",
           default=0.05, assumed="50 ms, detection and relays; to be measured", minimum=0.0, maximum=100.0,
           example="50", unit="ms"),
    Column("allowed stopping distance", ("length", "angle"), "way the load may go on moving after an emergency stop",
           positive=True, example=("", ""), unit=("mm", "deg")),
    Column("allowed drop distance", ("length", "angle"), "way a held load may sink until the holding brake carries "
           "it, when torque is removed", positive=True, example=("", ""), unit=("mm", "deg")),
    *STRENGTH_QUANTITIES,
    Column("catalog folder", TEXT, "folder with shared catalog tables, relative to the case", example=""),
    Column("direct drive allowed", YES_NO, "whether sets without gearhead are candidates", default="yes",
           assumed="nothing speaks against it", example="yes"),
    Column("rank by", WORDS, "what orders the sets that pass", words=RANKINGS, default="price",
           assumed="cheapest first", example="price"),
    Column("sets to detail", "count", "how many of the best sets are worked out in detail", default=10.0,
           assumed="ten", minimum=1.0, maximum=1000.0, example="10"),
    Column("largest bus over nominal voltage", "ratio", "motors whose stated nominal voltage is below the "
           "nominal bus voltage over this are left out: their insulation is not made for the bus", default=2.0,
           assumed="a winding may be fed from up to twice its nominal voltage", positive=True, example="2",
           unit="-"),
    Column("recommended inertia ratio", "ratio", "load inertia over motor inertia that advice is given "
           "against",
           default=10.0, assumed="common practice", positive=True, maximum=1.0e6, example="10"),
    Column("cycles per minute", "count", "pace of the whole cycle; the segments are stretched to it, or take "
           "their part of a master turn", positive=True, maximum=1.0e6, example=""),
    Column("measured period", "time", "duration of one cycle of the table 'measured'; found when empty",
           positive=True, maximum=1.0e7, example="", unit="s"),
    Column("smoothing cut-off", "frequency", "measured motion is not followed above this frequency; it is a choice "
           "that decides the acceleration", positive=True, maximum=1.0e6, example="", unit="Hz"),
    Column("standstill speed", ("linear speed", "angular speed"), "a measured motion slower than this throughout "
           "half a period of the cut-off is taken as standstill; when empty, what the scatter of the samples "
           "makes of it, 0.1 to 1 % of the peak speed",
           minimum=0.0, example="", unit=("m/s", "rpm")),
    Column("remove drift", YES_NO, "whether the measured cycle is bent back so that it closes", default="no",
           assumed="the measured motion is kept", example="no"),
    Column("recorded torque constant", "torque constant", "torque at the driven shaft per ampere of the measured "
           "current", positive=True, example="", unit="Nm/A"),
    Column("operating time per year", "time", "how long the axis runs its cycle in a year; for the energy of a year",
           positive=True, maximum=3.1623e7, example="", unit="h"),
    Column("price of energy per kWh", "price", "what a kilowatt-hour costs", minimum=0.0, maximum=1.0e6, example="",
           unit="EUR"),
    Column("required life", "time", "operating hours the axis must reach", positive=True, example="20000",
           unit="h"),
    Column("driven shaft stiffness", "torsional stiffness", "stiffness between gearhead and load (coupling, "
           "screw, belt) at the driven shaft, at the worst position", positive=True, maximum=1.0e12,
           example="", unit="Nm/rad"),
    Column("damping ratio", "ratio", "damping of the drive train at its resonance over critical damping (used "
           "with a stiffness; 0.02 where nothing is stated)", positive=True, maximum=1.0, example="", unit="-"),
    Column("encoder counts per turn", "count", "resolution of the motor's encoder, quadrature counted",
           minimum=1.0, maximum=1.0e12, example=""),
    Column("settling band", ("length", "angle"), "half width of the band around the target in which the load "
           "must rest within the dwell after each move", positive=True, example=("", ""), unit=("mm", "deg")),
    Column("allowed following error", ("length", "angle"), "largest difference between command and load "
           "during the cycle", positive=True, example=("", ""), unit=("mm", "deg")),
    Column("required speed bandwidth", "frequency", "bandwidth that the speed loop must reach", positive=True,
           maximum=1.0e6, example="", unit="Hz"),
)  # fmt: skip


def _from_parameter(parameter: Parameter) -> Column:
    """Axis quantity that a mechanism asks for."""
    value, _, unit = parameter.example.partition(" ")
    return Column(
        parameter.name,
        parameter.kind,
        parameter.help,
        required=parameter.default is None and not parameter.optional,
        default=parameter.default,
        assumed="default of the mechanism" if parameter.default is not None else "",
        minimum=parameter.minimum,
        maximum=parameter.maximum,
        positive=parameter.positive,
        example=value,
        unit=unit,
    )


def mechanism_quantities(mechanism: type[Mechanism]) -> tuple[Column, ...]:
    """Axis quantities of one mechanism beside the common ones: its geometry, then what its parts stand."""
    geometry = tuple(_from_parameter(parameter) for parameter in mechanism.parameters)
    return (*geometry, *MECHANISM_STRENGTH.get(mechanism.name, ()))


def axis_quantities(mechanism: type[Mechanism] | None = None) -> tuple[Column, ...]:
    """Axis quantities of a case: common ones first, then those of the mechanism.

    Without a mechanism, those of every mechanism are listed (the first declaration of a name counts).
    """
    chosen = tuple(MECHANISMS.values()) if mechanism is None else (mechanism,)
    found = {column.key: column for column in COMMON_QUANTITIES}
    for each in chosen:
        for column in mechanism_quantities(each):
            found.setdefault(column.key, column)
    return tuple(found.values())


# -- duty cycle, limits, tolerances -----------------------------------------------------------------------

DUTY_CYCLE_COLUMNS = (
    Column("segment", TEXT, "name of the segment", required=True, example="lift"),
    Column("motion law", WORDS, "how the segment moves", required=True, words=LAW_WORDS, example="trapezoid"),
    Column("displacement", ("length", "angle"), "signed distance moved in the segment", example=("0.3", "90"),
           unit=("m", "deg")),
    Column("end speed", ("linear speed", "angular speed"), "signed speed at the end of a speed ramp, the "
           "speed of a constant-speed segment, or the speed at which a trapezoid, jerk-limited move or spline "
           "hands over to the next segment", unit=("m/s", "rpm")),
    Column("duration", "time", "time the segment takes", positive=True, maximum=1.0e9, example="0.6",
           unit="s"),
    Column("maximum speed", ("linear speed", "angular speed"), "limit, not a target", positive=True,
           unit=("m/s", "rpm")),
    Column("maximum acceleration", ("linear acceleration", "angular acceleration"), "limit, not a target",
           positive=True, unit=("m/s²", "rad/s²")),
    Column("maximum deceleration", ("linear acceleration", "angular acceleration"), "limit while slowing down "
           "(trapezoid, jerk-limited); the maximum acceleration when empty", positive=True,
           unit=("m/s²", "rad/s²")),
    Column("maximum jerk", ("linear jerk", "angular jerk"), "limit, not a target", positive=True,
           unit=("m/s³", "rad/s³")),
    Column("acceleration share", "ratio", "part of the duration spent speeding up", minimum=0.0, maximum=1.0,
           unit="%"),
    Column("deceleration share", "ratio", "part of the duration spent slowing down", minimum=0.0,
           maximum=1.0, unit="%"),
    Column("jerk share", "ratio", "part of the acceleration phase taken by each jerk ramp", minimum=0.0,
           maximum=1.0, unit="%"),
    Column("amplitude", ("length", "angle"), "half of the way of a sinusoid, signed", unit=("mm", "deg")),
    Column("frequency", "frequency", "of a sinusoid", positive=True, maximum=1.0e6, unit="Hz"),
    Column("cycles", "count", "periods of a sinusoid, whole or half", positive=True, maximum=1000.0),
    Column("master angle", "angle", "part of the turn of a master shaft that the segment takes, in place of the "
           "duration; needs 'cycles per minute' in the axis table", positive=True, maximum=6.2832, unit="deg"),
    Column("payload", ("mass", "inertia"), "what is carried in this segment beside the moving mass or the "
           "load "
           "inertia", default=0.0, assumed="no payload", minimum=0.0, example=("12", "0.2"),
           unit=("kg", "kg·m²")),
    Column("process force", ("force", "torque"), "force or torque of the process; positive opposes positive "
           "motion and keeps its sign when the direction reverses", default=0.0, assumed="no process effort",
           example=("0", "0"), unit=("N", "N·m"), aliases=("process torque", "process effort")),
    Column("process force end", ("force", "torque"), "where the process force changes evenly: its value at the "
           "end of the segment, or of the window", unit=("N", "N·m"),
           aliases=("process torque end", "process effort end")),
    Column("process over", WORDS, "whether the process force changes over time or position", words=("time",
           "position")),
    Column("process from", ("length", "angle"), "position at which a window of process force begins, counted "
           "from the start of the cycle; there is none outside the window", unit=("mm", "deg")),
    Column("process to", ("length", "angle"), "position at which the window ends", unit=("mm", "deg")),
    Column("process reverses", YES_NO, "whether the process force turns round with the direction of motion, as "
           "wind resistance or friction does", default="no", assumed="it keeps its sign"),
    Column("brake closed", YES_NO, "whether the holding brake carries the load (standstill only)",
           default="no",
           assumed="the motor holds", example="no"),
    Column("cycle", TEXT, "cycle that the segment belongs to, such as normal, worst or start-up; the one of the row "
           "above when empty. Each cycle starts at the same place", example=""),
    Column("note", TEXT, "remark", example=""),
)  # fmt: skip

POINT_COLUMNS = (
    Column("segment", TEXT, "segment of the duty cycle with the motion law 'spline'", required=True,
           example="swing"),
    Column("time", "time", "from the start of the segment; the first point is at 0", minimum=0.0, maximum=1.0e9,
           example="0", unit="s"),
    Column("master angle", "angle", "instead of time: turn of the master shaft from the start of the segment, as a "
           "cam law states it; needs 'cycles per minute'", minimum=0.0, maximum=6.2832, unit="deg"),
    Column("position", ("length", "angle"), "counted from anywhere; the first point is where the segment starts",
           required=True, example="0", unit=("mm", "deg")),
)  # fmt: skip

PROCESS_COLUMNS = (
    Column("segment", TEXT, "segment of the duty cycle in which this process force acts", required=True,
           example="press"),
    Column("time", "time", "from the start of the segment", minimum=0.0, maximum=1.0e9, unit="s"),
    Column("position", ("length", "angle"), "instead of time: position counted from the start of the cycle",
           example="0", unit=("mm", "deg")),
    Column("process force", ("force", "torque"), "force or torque there, straight between the rows; two rows at "
           "one place make a jump", required=True, example="0", unit=("N", "N·m"),
           aliases=("process torque", "process effort")),
)  # fmt: skip

MEASURED_COLUMNS = (
    Column("sample", TEXT, "remark", example=""),
    Column("time", "time", "instant of the sample, rising; spacing may vary", required=True, example="0", unit="s"),
    Column("position", ("length", "angle"), "measured position of the load", unit=("mm", "deg")),
    Column("speed", ("linear speed", "angular speed"), "instead of the position", unit=("m/s", "rpm")),
    Column("process force", ("force", "torque"), "process alone; the mechanism adds inertia, gravity and friction",
           unit=("N", "N·m"), aliases=("process torque", "process effort")),
    Column("load force", ("force", "torque"), "all that the load asks for, inertia, gravity and friction included",
           unit=("N", "N·m"), aliases=("load torque", "load effort")),
    Column("shaft torque", "torque", "all that the driven shaft must give, losses of the mechanism included",
           unit="N·m"),
    Column("payload", ("mass", "inertia"), "carried at that instant, straight between samples",
           minimum=0.0, example=("", ""), unit=("kg", "kg·m²")),
    Column("current", "current", "of the motor that drove the axis; needs 'recorded torque constant'", unit="A"),
)  # fmt: skip

MAP_COLUMNS = (
    Column("shaft angle", "angle", "angle of the driven shaft; rising from row to row", required=True, minimum=-1.0e4,
           maximum=1.0e4, example="0", unit="deg"),
    Column("position", ("length", "angle"), "position of the load at that angle", required=True, example=("0", "0"),
           unit=("mm", "deg")),
)  # fmt: skip

RESISTOR_PULSE_COLUMNS = (
    Column("pulse duration", "time", "length of a pulse; longer from row to row", required=True, positive=True,
           maximum=1.0e6, example="1", unit="s"),
    Column("pulse energy", "energy", "energy that the brake resistor takes in one pulse of that length",
           required=True, positive=True, maximum=1.0e9, example="2", unit="kJ"),
)  # fmt: skip

BUS_PARTNER_COLUMNS = (
    Column("partner", TEXT, "name of another axis on the same DC bus", required=True, example="shuttle"),
    Column("case", TEXT, "workbook or folder of its case, relative to this case", required=True,
           example="../shuttle"),
    Column("motor", TEXT, "motor of its set; without parts the best set of that case is taken", example=""),
    Column("gearhead", TEXT, "gearhead of its set; empty for direct drive", example=""),
    Column("drive", TEXT, "drive of its set", example=""),
    Column("time offset", "time", "start of its cycle after the start of this axis' cycle; empty: free, and the "
           "worst is sought", minimum=-1.0e6, maximum=1.0e6, example="", unit="s"),
)  # fmt: skip

INERTIA_SHAPES = ("solid cylinder", "hollow cylinder", "block", "point mass", "screw", "pulley", "belt", "coupling",
                  "brake")  # fmt: skip
INERTIA_PLACES = ("driven shaft", "load", "motor")

INERTIA_COLUMNS = (
    Column("part", TEXT, "name of the part", required=True, example="coupling"),
    Column("shape", WORDS, "what its dimensions mean", required=True, words=INERTIA_SHAPES, example="coupling"),
    Column("referred to", WORDS, "what it turns or moves with", required=True, words=INERTIA_PLACES, example="motor"),
    Column("inertia", "inertia", "inertia about its own axis, where it is known; then no size is needed", minimum=0.0,
           example="0.05", unit="kg·cm²"),
    Column("mass", "mass", "mass, where it is known; else from size and density", minimum=0.0, unit="kg"),
    Column("diameter", "length", "outer diameter of a cylinder, screw, pulley, coupling or brake; diameter that a "
           "belt runs on", positive=True, unit="mm"),
    Column("inner diameter", "length", "bore of a hollow cylinder, pulley, coupling or brake", minimum=0.0,
           unit="mm"),
    Column("length", "length", "length of a cylinder along its axis; of a block along one side", positive=True,
           unit="mm"),
    Column("width", "length", "second side of a block", positive=True, unit="mm"),
    Column("height", "length", "side of a block along the axis that it turns about", positive=True, unit="mm"),
    Column("density", "density", "density of the material", positive=True, default=7850.0, assumed="steel",
           unit="kg/m³"),
    Column("offset", "length", "distance of the part's centre from the axis that it turns about", default=0.0,
           assumed="on the axis", minimum=0.0, unit="mm"),
    Column("count", "count", "how many of them", default=1.0, assumed="one", minimum=1.0, maximum=10000.0),
    Column("source", TEXT, "where the dimensions come from", example=""),
)  # fmt: skip

LIMIT_COLUMNS = (
    Column("check", WORDS, "which check", required=True, words=tuple(title for _, title in CHECK_NAMES),
           example="RMS current"),
    Column("applies", WORDS, "yes: must pass; advice: reported only; no: left out",
           words=("yes", "no", "advice"), default="yes", assumed="every check applies", example="yes"),
    Column("allowed utilisation", "ratio", "demand over capacity that still passes",
           default=DEFAULT_ALLOWED_UTILISATION, assumed="the full capacity", positive=True, maximum=100.0,
           example="100", unit="%"),
    Column("recommended reserve", "ratio", "reserve below which a pass is marked low",
           default=DEFAULT_RECOMMENDED_RESERVE, assumed="common practice", minimum=0.0, maximum=1.0,
           example="10", unit="%"),
)  # fmt: skip

DISTRIBUTIONS = ("normal", "uniform", "triangular", "truncated normal")

TOLERANCE_COLUMNS = (
    Column("quantity", TEXT, "name of an axis quantity, or of a motor, gearhead or drive column",
           required=True,
           example="resistance terminal-to-terminal"),
    Column("distribution", WORDS, "shape of the spread", required=True,
           words=DISTRIBUTIONS, example="normal"),
    Column("width", TEXT, "standard deviation of a normal, half width of a uniform or triangular "
           "distribution",
           required=True, example="3"),
    Column("unit", TEXT, "% of the value, or a unit of the quantity", required=True, example="%"),
    Column("table", WORDS, "where the quantity stands; needed where several tables have one of that name",
           words=("axis", "duty_cycle", "motors", "gearheads", "drives")),
    Column("truncation", "ratio", "standard deviations from the value at which a truncated normal distribution ends",
           default=3.0, assumed="three standard deviations", positive=True, maximum=10.0),
    Column("correlation", TEXT, "how it varies together with other quantities of this table, -1 to 1: 'torque "
           "constant 0.9; inductance 0.8'"),
    Column("source", TEXT, "where the spread comes from", example="winding tolerance of the maker"),
)  # fmt: skip

TABLES: dict[str, Table] = {
    table.name: table
    for table in (
        Table("axis", "One row is one quantity of the axis: mechanism, masses, friction, supply, "
              "surroundings.",
              AXIS_COLUMNS, required=True),
        Table("duty_cycle", "One row is one segment of the motion; the rows follow each other and repeat.",
              DUTY_CYCLE_COLUMNS, required=True, repeats_names=True),
        Table("cycles", "One row says how one named cycle runs, and how often.", CYCLES_COLUMNS, in_template=False),
        Table("duty_types", "One row is one load of a duty type of IEC 60034-1, made into a cycle; beside or in "
              "place of the duty cycle.", DUTY_TYPE_COLUMNS, repeats_names=True, in_template=False),
        Table("points", "One row is one point that a segment with the motion law 'spline' passes.",
              POINT_COLUMNS, repeats_names=True, in_template=False),
        Table("process", "One row is one value of a process force along a segment.",
              PROCESS_COLUMNS, repeats_names=True, in_template=False),
        Table("measured", "One row is one sample of a measured or simulated cycle, in place of the duty cycle. "
              "Efforts are straight between samples; a motion is smoothed by 'smoothing cut-off'.",
              MEASURED_COLUMNS, repeats_names=True, in_template=False),
        Table("motors", "One row is one motor as its data sheet states it.", MOTOR_COLUMNS, required=True,
              is_catalog=True,
              one_of=(("rotary", ("torque constant", "back-EMF constant", "speed constant")),
                      ("linear", ("force constant", "linear back-EMF constant")),
                      ("rotary", ("continuous current", "continuous torque")),
                      ("linear", ("continuous current", "continuous force")))),
        Table("gearheads", "One row is one gearhead with one ratio.", GEARHEAD_COLUMNS, is_catalog=True),
        Table("drives", "One row is one drive.", DRIVE_COLUMNS, required=True, is_catalog=True),
        Table("limits", "One row says how one check is judged; checks not listed keep their defaults.",
              LIMIT_COLUMNS),
        Table("tolerances", "One row is the spread of one input quantity.", TOLERANCE_COLUMNS, repeats_names=True),
        Table("map", "One row is one point of the curve on which the load follows the driven shaft, for the "
              "tabulated mechanisms; a smooth spline goes through the points.", MAP_COLUMNS),
        Table("resistor_pulses", "One row is one point of the pulse curve of the brake resistor, in place of 'brake "
              "resistor pulse energy'.", RESISTOR_PULSE_COLUMNS, in_template=False),
        Table("bus_partners", "One row is another axis on the same DC bus.", BUS_PARTNER_COLUMNS, in_template=False),
        Table("inertias", "One row is one part of the inertia inventory; its inertia is added to that of the axis.",
              INERTIA_COLUMNS),
    )
}  # fmt: skip

CATALOG_TABLES = tuple(name for name, table in TABLES.items() if table.is_catalog)


def table_for(name: str, mechanism: type[Mechanism] | None, stated_at: str = "") -> Table:
    """Table with the kinds of quantity that hold for one mechanism.

    The motion is that of load or driven shaft as stated, a payload is a mass or an inertia as the mechanism
    says, and process efforts belong to the load.
    """
    table = TABLES[name]
    if mechanism is None or name not in ("duty_cycle", "duty_types", "map", "measured"):
        return table
    moved = ROTARY if (stated_at or mechanism.motion_at) == SHAFT and name != "map" else mechanism.coordinate
    if mechanism.drives_linear_motor:
        moved = LINEAR
    carried = LINEAR if mechanism.carries_mass() else ROTARY

    def resolved(column: Column) -> Column:
        if isinstance(column.kind, str):
            return column
        side = moved
        if column.kind[0] == "mass":
            side = carried
        elif column.kind[0] == "force":
            side = mechanism.coordinate
        return replace(
            column, kind=column.kind_for(side), example=column.example_for(side), unit=column.unit_for(side)
        )

    return replace(table, columns=tuple(resolved(column) for column in table.columns))


__all__ = [
    "ABSOLUTE_ZERO_DEGC",
    "AXIS_COLUMNS",
    "CATALOG_TABLES",
    "COMMON_QUANTITIES",
    "DISTRIBUTIONS",
    "DRIVE_COLUMNS",
    "DUTY_CYCLE_COLUMNS",
    "INERTIA_COLUMNS",
    "INERTIA_PLACES",
    "INERTIA_SHAPES",
    "GEARHEAD_COLUMNS",
    "LAW_WORDS",
    "LIMIT_COLUMNS",
    "MAP_COLUMNS",
    "MOTOR_COLUMNS",
    "RANKINGS",
    "TABLES",
    "TEXT",
    "TOLERANCE_COLUMNS",
    "UNITLESS_KINDS",
    "WORDS",
    "YES_NO",
    "Column",
    "Table",
    "axis_quantities",
    "find",
    "fold",
    "key_of",
    "mechanism_quantities",
    "nearest",
    "table_for",
]
