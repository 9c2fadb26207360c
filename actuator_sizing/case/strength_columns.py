"""Columns and quantities that only the checks of strength, life, stopping and holding read.

A column that no part of a catalog fills in, and a quantity that the case does not state, asks nothing: the check
is then not made. One that is filled in for some parts is asked of all of them.
"""

from __future__ import annotations

from dataclasses import replace

from actuator_sizing.case.columns import WORDS, Column
from actuator_sizing.core.screws import END_FIXITIES

BEARINGS = ("ball", "roller")

#: Bearings of the output shaft of a motor or gearhead.
SHAFT_COLUMNS = (
    Column("permissible radial force", "force", "on the output shaft, where 'radial force position' says",
           positive=True,
           maximum=1.0e9, machine="rotary", example="", unit="N"),
    Column("radial force position", "length", "where the permissible radial force acts, from the shaft's shoulder "
           "or flange", minimum=0.0, maximum=10.0, machine="rotary", example="", unit="mm"),
    Column("bearing lever", "length", "from that shoulder back to the middle of the bearings; converts the "
           "permissible "
           "radial force to another position", positive=True, maximum=10.0, machine="rotary", example="", unit="mm"),
    Column("permissible axial force", "force", "on the output shaft", positive=True, maximum=1.0e9, machine="rotary",
           example="", unit="N"),
    Column("bearing life", "time", "life of the bearings (L10) under the permissible radial force", positive=True,
           maximum=1.0e10, machine="rotary", example="", unit="h"),
    Column("bearing life speed", "angular speed", "speed of that shaft which the bearing life belongs to",
           positive=True,
           maximum=1.0e6, machine="rotary", example="", unit="rpm"),
    Column("shaft bearings", WORDS, "kind of bearing of the output shaft (default: ball); its life goes with "
           "the power "
           "3 or 10/3 of the load", words=BEARINGS, machine="rotary", example=""),
)  # fmt: skip

MOTOR_STRENGTH_COLUMNS = (
    Column("demagnetisation current", "current", "largest current that the hot magnets stand", positive=True,
           maximum=1.0e6, example="", unit="A"),
    Column("brush life", "time", "hours until brushes or commutator are worn, at the rated current", positive=True,
           maximum=1.0e10, example="", unit="h"),
    Column("brake coil power", "power", "heat of the holding brake's coil while it is released", minimum=0.0,
           maximum=1.0e6, example="", unit="W"),
    Column("brake work until wear", "energy", "work of friction that the holding brake does in its life",
           positive=True,
           maximum=1.0e15, example="", unit="kJ"),
    Column("brake stops allowed", "count", "stops from speed that the holding brake stands in its life", minimum=1.0,
           maximum=1.0e9, example=""),
    *SHAFT_COLUMNS,
)  # fmt: skip

GEARHEAD_STRENGTH_COLUMNS = (
    Column("gear bearings", WORDS, "kind of bearing that governs the wear of the gears' shafts (default: ball); the "
           "equivalent torque takes the power 3 or 10/3", words=BEARINGS, example=""),
    Column("thermal power", "power", "mean power at the input that it passes for ever without overheating",
           positive=True, maximum=1.0e9, example="", unit="kW"),
    Column("rated life", "time", "life at rated torque and rated input speed", positive=True, maximum=1.0e10,
           example="", unit="h"),
    Column("rated torque", "torque", "torque at the output that the rated life belongs to (default: the continuous "
           "torque)", positive=True, maximum=1.0e8, example="", unit="Nm"),
    Column("rated input speed", "angular speed", "speed at the input that the rated life belongs to", positive=True,
           maximum=1.0e6, example="", unit="rpm"),
    *(replace(column, machine="") for column in SHAFT_COLUMNS),
)  # fmt: skip

#: Of every axis.
STRENGTH_QUANTITIES = (
    Column("application factor", "ratio", "shocks of the driven machine: factor on the torques of gearhead, "
           "coupling, "
           "belt and rack", default=1.0, assumed="even load", minimum=1.0, maximum=10.0, example="1", unit="-"),
    Column("coupling torque limit", "torque", "torque that the coupling on the driven shaft stands again and again",
           positive=True, maximum=1.0e9, example="", unit="Nm"),
    Column("shaft radial force", "force", "across the shaft of gearhead or motor, from belt, gear or weight; a "
           "belt axis "
           "with a pretension and a rack with a pressure angle give it by themselves", minimum=0.0, maximum=1.0e9,
           example="", unit="N"),
    Column("shaft axial force", "force", "along that shaft", minimum=0.0, maximum=1.0e9, example="", unit="N"),
    Column("shaft force position", "length", "where the radial force acts, from the shaft's shoulder or flange",
           minimum=0.0, maximum=10.0, example="", unit="mm"),
    Column("jam duration", "time", "how long a blocked axis draws the peak current until the drive gives up",
           positive=True,
           maximum=1.0e5, example="", unit="s"),
    Column("stops in a row", "count", "emergency stops one after the other, each but the last followed by a "
           "start at the "
           "peak current", minimum=1.0, maximum=1000.0, example=""),
    Column("brake stops in life", "count", "stops from speed that the holding brake has to make", minimum=0.0,
           maximum=1.0e9, example=""),
    Column("brake torque factor", "ratio", "hot and worn over stated torque of the holding brake", default=1.0,
           assumed="the sheet states the torque that is guaranteed hot and worn; where it states a nominal one, "
           "0.7 to "
           "0.8 is common practice", positive=True, maximum=1.0, example="100", unit="%"),
)  # fmt: skip

_SCREW_QUANTITIES = (
    Column("screw root diameter", "length", "at the bottom of the thread, for whirling and buckling", positive=True,
           maximum=10.0, example="", unit="mm"),
    Column("screw unsupported length", "length", "longest free length between nut and bearing", positive=True,
           maximum=1000.0, example="", unit="mm"),
    Column("screw end fixity", WORDS, "how bearing and nut hold the ends of that length", words=tuple(END_FIXITIES),
           example=""),
    Column("screw yield strength", "pressure", "needed where the screw is too short for Euler's buckling",
           positive=True,
           maximum=1.0e10, example="", unit="MPa"),
    Column("screw static load rating", "force", "axial force that just leaves marks, or that the nut holds",
           positive=True,
           maximum=1.0e9, example="", unit="kN"),
)  # fmt: skip

_BALL_SCREW_QUANTITIES = (
    *_SCREW_QUANTITIES,
    Column("screw dynamic load rating", "force", "axial force for a life of a million turns", positive=True,
           maximum=1.0e9, example="", unit="kN"),
    Column("screw preload", "force", "axial force between the two halves of the nut", minimum=0.0, maximum=1.0e9,
           example="", unit="N"),
    Column("screw DN limit", "count", "largest nominal diameter in mm times speed in 1/min", positive=True,
           maximum=1.0e7, example=""),
)  # fmt: skip

_LEAD_SCREW_QUANTITIES = (
    *_SCREW_QUANTITIES,
    Column("nut contact area", "area", "of all flanks that bear, across the axis", positive=True, maximum=10.0,
           example="",
           unit="mm²"),
    Column("allowed nut pressure times speed", "pressure times speed", "of the pair of materials, for ever",
           positive=True,
           maximum=1.0e12, example="", unit="MPa·m/s"),
)  # fmt: skip

#: Of one mechanism.
MECHANISM_STRENGTH: dict[str, tuple[Column, ...]] = {
    "ball screw": _BALL_SCREW_QUANTITIES,
    "lead screw": _LEAD_SCREW_QUANTITIES,
    "belt": (
        Column("belt pretension", "force", "in each strand, at rest", minimum=0.0, maximum=1.0e8, example="",
               unit="N"),
        Column("allowed belt tension", "force", "of the whole width", positive=True, maximum=1.0e8, example="",
               unit="N"),
        Column("allowed force per tooth", "force", "of the whole width, at the largest speed", positive=True,
               maximum=1.0e8, example="", unit="N"),
        Column("teeth in mesh", "count", "on the driven pulley", minimum=1.0, maximum=1000.0, example=""),
    ),
    "rack and pinion": (
        Column("allowed tangential force", "force", "of rack and pinion, for the life wanted", positive=True,
               maximum=1.0e9, example="", unit="kN"),
        Column("pressure angle", "angle", "of the teeth, in the plane of the pinion; gives the radial force",
               positive=True,
               maximum=0.8, example="", unit="deg"),
    ),
}  # fmt: skip
