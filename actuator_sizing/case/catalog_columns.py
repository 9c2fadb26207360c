"""Columns of the catalog tables: motors, gearheads, drives. Bounds are SI.

The upper bounds are far outside anything built; they catch a slip of several powers of ten and keep every
later product finite.
"""

from __future__ import annotations

from actuator_sizing.case.columns import TEXT, WORDS, Column
from actuator_sizing.case.strength_columns import GEARHEAD_STRENGTH_COLUMNS, MOTOR_STRENGTH_COLUMNS
from actuator_sizing.core.materials import MAGNET_COEFFICIENTS_PER_K, THERMAL_CLASSES
from actuator_sizing.core.parameters import COMMUTATIONS, CURRENT_BASES

VOLTAGE_BASES = ("DC", "rms line-to-line", "peak line-to-line", "rms phase", "peak phase")
MAGNET_MATERIALS = (*MAGNET_COEFFICIENTS_PER_K, "none", "unknown")

_AMBIENT_ASSUMED = "25 °C, where nothing is stated"

MOTOR_COLUMNS = (
    Column("motor", TEXT, "name of the motor as it is ordered", required=True, example="example motor"),
    Column("commutation", WORDS, "how the winding is fed", required=True, words=COMMUTATIONS,
           example="sinusoidal"),
    Column("current basis", WORDS, "which ampere the sheet means: DC, rms or peak of the phase current",
           required=True, words=CURRENT_BASES, example="rms"),
    Column("resistance terminal-to-terminal", "resistance", "resistance between two terminals, cold",
           required=True, positive=True, maximum=1.0e6, example="2.4", unit="Ω",
           aliases=("terminal resistance", "resistance line-to-line")),
    Column("resistance temperature", "temperature", "winding temperature the resistance belongs to",
           default=25.0, assumed=_AMBIENT_ASSUMED, minimum=-60.0, maximum=400.0, example="25", unit="°C"),
    Column("resistance temperature coefficient", "temperature coefficient", "relative change of the "
           "resistance per kelvin at that temperature (default: copper)", minimum=0.0, maximum=0.1,
           example="",
           unit="%/K"),
    Column("inductance terminal-to-terminal", "inductance", "inductance between two terminals", required=True,
           minimum=0.0, maximum=1.0e3, example="9", unit="mH",
           aliases=("terminal inductance", "inductance line-to-line")),
    Column("torque constant", "torque constant", "torque per ampere in the current basis", positive=True,
           maximum=1.0e6, machine="rotary", example="0.95", unit="Nm/A"),
    Column("back-EMF constant", "back-EMF constant", "voltage per speed at no load", positive=True,
           maximum=1.0e6, machine="rotary", example="", unit="V/krpm"),
    Column("back-EMF constant basis", WORDS, "which voltage the back-EMF constant means (default: DC, or rms "
           "line-to-line for a sinusoidal motor)", words=VOLTAGE_BASES, example=""),
    Column("speed constant", "speed constant", "speed per voltage at no load", positive=True, maximum=1.0e6,
           machine="rotary", example="", unit="rpm/V"),
    Column("speed constant basis", WORDS, "which voltage the speed constant means (default: DC, or rms "
           "line-to-line for a sinusoidal motor)", words=VOLTAGE_BASES, machine="rotary", example=""),
    Column("force constant", "force constant", "force per ampere in the current basis", positive=True,
           maximum=1.0e6, machine="linear", example="56", unit="N/A"),
    Column("linear back-EMF constant", "linear back-EMF constant", "voltage per speed of a linear motor",
           positive=True, maximum=1.0e6, machine="linear", example="", unit="V·s/m"),
    Column("pole pairs", "count", "pole pairs; without them the winding's reactance is not counted",
           minimum=1.0, maximum=1000.0, machine="rotary", example="4"),
    Column("pole pitch", "length", "distance from north to south pole of a linear motor; without it the "
           "winding's reactance is not counted", positive=True, maximum=10.0, machine="linear", example="16",
           unit="mm"),
    Column("rotor inertia", "inertia", "moment of inertia of the rotor without brake", required=True,
           positive=True, maximum=1.0e6, machine="rotary", example="2.6", unit="kg·cm²"),
    Column("moving mass", "mass", "mass of the moving part of a linear motor", required=True, positive=True,
           maximum=1.0e6, machine="linear", example="3.1", unit="kg"),
    Column("friction torque", "torque", "constant (Coulomb) friction of bearings, seals and brushes",
           minimum=0.0, maximum=1.0e6, machine="rotary", example="0.05", unit="Nm"),
    Column("friction force", "force", "constant (Coulomb) friction of a linear motor", minimum=0.0,
           maximum=1.0e7, machine="linear", example="", unit="N"),
    Column("viscous friction", "rotary damping", "friction and iron loss in proportion to speed", minimum=0.0,
           maximum=1.0e6, machine="rotary", example="0.02", unit="Nm/krpm"),
    Column("linear viscous friction", "linear damping", "friction and iron loss of a linear motor in "
           "proportion to speed", minimum=0.0, maximum=1.0e7, machine="linear", example="", unit="N·s/m"),
    Column("no-load current", "current", "current at the no-load speed; gives the friction if that is not "
           "stated", minimum=0.0, maximum=1.0e5, machine="rotary", example="", unit="A"),
    Column("no-load speed", "angular speed", "speed without load at the nominal voltage", positive=True,
           maximum=1.0e6, machine="rotary", example="", unit="rpm"),
    Column("nominal voltage", "voltage", "voltage the rated and no-load points belong to", positive=True,
           maximum=1.0e5, example="320", unit="V"),
    Column("continuous current", "current", "current that just reaches the winding limit, at standstill or "
           "low "
           "speed", positive=True, maximum=1.0e6, example="4.4", unit="A"),
    Column("continuous torque", "torque", "torque at that current", positive=True, maximum=1.0e7,
           machine="rotary", example="", unit="Nm"),
    Column("continuous force", "force", "force at that current", positive=True, maximum=1.0e8,
           machine="linear", example="", unit="N"),
    Column("continuous-rating ambient", "temperature", "ambient temperature the continuous rating belongs to",
           default=25.0, assumed=_AMBIENT_ASSUMED, minimum=-60.0, maximum=200.0, example="25", unit="°C"),
    Column("peak current", "current", "largest current allowed for a short time", positive=True,
           maximum=1.0e6, example="16", unit="A"),
    Column("peak torque", "torque", "torque at the peak current", positive=True, maximum=1.0e7,
           machine="rotary", example="14", unit="Nm"),
    Column("peak force", "force", "force at the peak current", positive=True, maximum=1.0e8, machine="linear",
           example="820", unit="N"),
    Column("maximum speed", "angular speed", "largest speed allowed mechanically", required=True,
           positive=True, maximum=1.0e6, machine="rotary", example="5000", unit="rpm"),
    Column("maximum linear speed", "linear speed", "largest speed allowed mechanically", required=True,
           positive=True, maximum=1.0e4, machine="linear", example="5", unit="m/s"),
    Column("winding temperature limit", "temperature", "largest winding temperature", minimum=0.0,
           maximum=400.0, example="", unit="°C"),
    Column("thermal class", WORDS, "thermal class of the insulation (IEC 60085); gives the winding limit",
           words=tuple(THERMAL_CLASSES), example="F"),
    Column("thermal resistance winding-housing", "thermal resistance", "temperature difference per watt, "
           "winding to housing", positive=True, maximum=1.0e6, example="0.35", unit="K/W",
           aliases=("thermal resistance winding to housing",)),
    Column("thermal resistance housing-ambient", "thermal resistance", "temperature difference per watt, "
           "housing to ambient, mounted as rated", positive=True, maximum=1.0e6, example="0.85", unit="K/W",
           aliases=("thermal resistance housing to ambient",)),
    Column("winding time constant", "time", "thermal time constant of the winding", positive=True,
           maximum=1.0e7, example="55", unit="s"),
    Column("housing time constant", "time", "thermal time constant of the whole motor", positive=True,
           maximum=1.0e8, example="1800", unit="s", aliases=("motor time constant",)),
    Column("magnet material", WORDS, "gives the temperature coefficient of the torque constant",
           words=MAGNET_MATERIALS, example="NdFeB"),
    Column("magnet temperature coefficient", "temperature coefficient", "relative change of the torque "
           "constant per kelvin, zero or negative", minimum=-0.02, maximum=0.0, example="", unit="%/K"),
    Column("magnet reference temperature", "temperature", "magnet temperature the torque constant belongs to "
           "(default: the resistance temperature)", minimum=-60.0, maximum=300.0, example="", unit="°C"),
    Column("brake torque", "torque", "static torque of the built-in holding brake", minimum=0.0,
           maximum=1.0e7, machine="rotary", example="", unit="Nm"),
    Column("brake force", "force", "static force of the built-in holding brake", minimum=0.0, maximum=1.0e8,
           machine="linear", example="", unit="N"),
    Column("brake inertia", "inertia", "moment of inertia that the brake adds to the rotor", minimum=0.0,
           maximum=1.0e6, machine="rotary", example="", unit="kg·cm²"),
    Column("brake closing time", "time", "from switching the brake off until it carries its torque", minimum=0.0,
           maximum=100.0, example="", unit="ms"),
    Column("brake energy per stop", "energy", "energy the holding brake takes in one stop from speed",
           positive=True, maximum=1.0e9, example="", unit="J"),
    *MOTOR_STRENGTH_COLUMNS,
    Column("mass", "mass", "mass of the motor", minimum=0.0, maximum=1.0e6, example="4.5", unit="kg"),
    Column("length", "length", "length of the motor", minimum=0.0, maximum=1.0e3, example="170", unit="mm"),
    Column("price", "price", "price of one piece", minimum=0.0, maximum=1.0e9, example="420", unit="EUR"),
    Column("rated torque", "torque", "torque of the rated point", positive=True, maximum=1.0e7,
           machine="rotary", example="3.9", unit="Nm"),
    Column("rated speed", "angular speed", "speed of the rated point", positive=True, maximum=1.0e6,
           machine="rotary", example="3000", unit="rpm"),
    Column("rated current", "current", "current of the rated point", positive=True, maximum=1.0e6,
           example="4.3", unit="A"),
    Column("stall torque", "torque", "locked-rotor torque at the nominal voltage, cold; audit only",
           positive=True, maximum=1.0e8, machine="rotary", example="", unit="Nm"),
    Column("stall current", "current", "locked-rotor current at the nominal voltage, cold; audit only",
           positive=True, maximum=1.0e7, example="", unit="A"),
    Column("motor constant", "motor constant", "torque per square root of copper loss; audit only",
           positive=True, maximum=1.0e6, machine="rotary", example="", unit="N·m/√W"),
    Column("mechanical time constant", "time", "of the rotor alone with shorted terminals; audit only",
           positive=True, maximum=1.0e6, example="", unit="ms"),
    Column("electrical time constant", "time", "inductance over resistance; audit only", positive=True,
           maximum=1.0e6, example="", unit="ms"),
    Column("source", TEXT, "data sheet, edition, page", example="made up for illustration"),
    Column("note", TEXT, "remark", example=""),
)  # fmt: skip

GEARHEAD_COLUMNS = (
    Column("gearhead", TEXT, "name of the gearhead as it is ordered", required=True, example="example "
           "gearhead"),
    Column("ratio", "ratio", "input turns per output turn; a number or an exact fraction such as 91/6",
           required=True, positive=True, maximum=1.0e6, fraction=True, example="5"),
    Column("stages", "count", "number of stages", minimum=1.0, maximum=100.0, example="1"),
    Column("continuous torque", "torque", "permissible equivalent torque at the output; of a strain-wave gear the "
           "limit for average torque", required=True, positive=True, maximum=1.0e8, example="30", unit="Nm",
           aliases=("average torque limit",)),
    Column("peak torque", "torque", "permissible repeated peak torque at the output", positive=True,
           maximum=1.0e8, example="75", unit="Nm", aliases=("repeated peak torque",)),
    Column("emergency-stop torque", "torque", "torque allowed a limited number of times at the output; of a "
           "strain-wave gear the momentary peak, before teeth ratchet",
           positive=True, maximum=1.0e8, example="150", unit="Nm", aliases=("momentary peak torque",)),
    Column("mean input speed", "angular speed", "permissible mean speed at the input", positive=True,
           maximum=1.0e6, example="3000", unit="rpm"),
    Column("maximum input speed", "angular speed", "permissible speed at the input", required=True,
           positive=True, maximum=1.0e6, example="6000", unit="rpm"),
    Column("efficiency", "ratio", "power at the output over power at the input when driving", required=True,
           positive=True, maximum=1.0, example="96", unit="%"),
    Column("back-driving efficiency", "ratio", "the same when the load drives; 0 or below is self-locking "
           "(default 2 − 1/efficiency)", minimum=-1000.0, maximum=1.0, example="", unit="%"),
    Column("no-load running torque", "torque", "torque that turns the input without load", minimum=0.0,
           maximum=1.0e6, example="0.1", unit="Nm"),
    Column("inertia at input", "inertia", "moment of inertia referred to the input", default=0.0,
           assumed="none stated", minimum=0.0, maximum=1.0e6, example="0.5", unit="kg·cm²"),
    *GEARHEAD_STRENGTH_COLUMNS,
    Column("torsional stiffness", "torsional stiffness", "at the output with the input locked", positive=True,
           maximum=1.0e12, example="3", unit="Nm/arcmin"),
    Column("backlash", "angle", "at the output", minimum=0.0, maximum=1.0, example="8", unit="arcmin"),
    Column("mass", "mass", "mass of the gearhead", minimum=0.0, maximum=1.0e6, example="2.1", unit="kg"),
    Column("price", "price", "price of one piece", minimum=0.0, maximum=1.0e9, example="260", unit="EUR"),
    Column("source", TEXT, "data sheet, edition, page", example="made up for illustration"),
    Column("note", TEXT, "remark", example=""),
)  # fmt: skip

DRIVE_COLUMNS = (
    Column("drive", TEXT, "name of the drive as it is ordered", required=True, example="example drive"),
    Column("current basis", WORDS, "which ampere the sheet means: DC, rms or peak of the phase current",
           required=True, words=CURRENT_BASES, example="rms"),
    Column("commutation", WORDS, "motors it can feed (default: brushed and six-step for a DC basis, "
           "sinusoidal "
           "for rms or peak)", words=COMMUTATIONS, several=True, example="sinusoidal"),
    Column("continuous current", "current", "current it gives for ever", required=True, positive=True,
           maximum=1.0e6, example="6", unit="A"),
    Column("peak current", "current", "current it gives for the peak time", required=True, positive=True,
           maximum=1.0e6, example="18", unit="A"),
    Column("peak time", "time", "how long it gives the peak current", positive=True, maximum=1.0e6,
           example="2",
           unit="s"),
    Column("RMS window", "time", "window over which the continuous current is judged (default: the whole "
           "cycle)", positive=True, maximum=1.0e6, example="", unit="s"),
    Column("continuous-rating ambient", "temperature", "ambient temperature up to which the continuous "
           "current "
           "holds", default=40.0, assumed="40 °C, the usual reference site", minimum=-60.0, maximum=200.0,
           example="40", unit="°C"),
    Column("ambient derating", "temperature coefficient", "part of the continuous current lost per kelvin above that "
           "ambient", minimum=0.0, maximum=1.0, example="", unit="%/K"),
    Column("altitude derating per 100 m", "ratio", "part of the continuous current lost per 100 m above 1000 m",
           minimum=0.0, maximum=1.0, example="", unit="%"),
    Column("standstill current", "current", "current it gives for ever at standstill, where one leg carries the "
           "amplitude", positive=True, maximum=1.0e6, example="", unit="A"),
    Column("maximum output frequency", "frequency", "largest electrical frequency it makes", positive=True,
           maximum=1.0e6, example="", unit="Hz"),
    Column("PWM frequency", "frequency", "frequency of its pulses", positive=True, maximum=1.0e8, example="",
           unit="kHz"),
    Column("minimum load inductance", "inductance", "smallest inductance between two terminals that it may feed",
           minimum=0.0, maximum=1.0, example="", unit="mH"),
    Column("minimum bus voltage", "voltage", "lowest DC bus voltage it works at", required=True, minimum=0.0,
           maximum=1.0e5, example="100", unit="V"),
    Column("maximum bus voltage", "voltage", "DC bus voltage at which it switches off", required=True,
           positive=True, maximum=1.0e5, example="410", unit="V"),
    Column("internal capacitance", "capacitance", "DC bus capacitance inside", minimum=0.0, maximum=1.0e3,
           example="680", unit="µF"),
    Column("chopper threshold", "voltage", "bus voltage at which its brake chopper switches on",
           positive=True,
           maximum=1.0e5, example="385", unit="V"),
    Column("chopper hysteresis", "voltage", "how far below its threshold the brake chopper switches off again",
           minimum=0.0, maximum=1.0e4, example="", unit="V"),
    Column("stand-by power", "power", "what it takes from the bus all the time: electronics and fan", minimum=0.0,
           maximum=1.0e6, example="", unit="W"),
    Column("minimum brake resistor", "resistance", "smallest brake resistor it stands", positive=True,
           maximum=1.0e6, example="25", unit="Ω", aliases=("minimum resistor",)),
    Column("efficiency", "ratio", "power to the motor over power from the bus", positive=True, maximum=1.0,
           example="96", unit="%"),
    Column("control rate", "frequency", "rate of the current loop", positive=True, maximum=1.0e9, example="8",
           unit="kHz"),
    Column("mass", "mass", "mass of the drive", minimum=0.0, maximum=1.0e6, example="1.4", unit="kg"),
    Column("price", "price", "price of one piece", minimum=0.0, maximum=1.0e9, example="380", unit="EUR"),
    Column("source", TEXT, "data sheet, edition, page", example="made up for illustration"),
    Column("note", TEXT, "remark", example=""),
)  # fmt: skip
