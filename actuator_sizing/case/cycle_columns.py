"""Columns of the tables that name cycles: how each of them runs, and duty types made into cycles."""

from __future__ import annotations

from actuator_sizing.case.columns import TEXT, WORDS, YES_NO, Column
from actuator_sizing.case.model import ONCE_COLD, ONCE_WARM, REPEATS, SHORT_TIME

RUNS_WORDS = (REPEATS, SHORT_TIME, ONCE_COLD, ONCE_WARM)
#: IEC 60034-1: continuous; short-time; intermittent periodic, the same with starting, and with electric braking;
#: continuous with intermittent load; with related changes of load and speed; discrete constant loads.
DUTY_TYPES = ("S1", "S2", "S3", "S4", "S5", "S6", "S8", "S10")

CYCLES_COLUMNS = (
    Column("cycle", TEXT, "name of the cycle, as in duty_cycle or duty_types", required=True, example="normal"),
    Column("runs", WORDS, "repeats: again and again, temperatures in their periodic state; short-time: from "
           "cold, and cold again before the next run; once from cold: a start after a long rest; once from warm: out "
           "of the hottest state that the repeating cycles reach. After a cycle that runs once, the repeating one "
           "that then gets hottest follows", words=RUNS_WORDS, default=REPEATS, assumed="a cycle repeats",
           example=REPEATS),
    Column("share of time", "ratio", "part of the operating time that this cycle takes; what is left over is rest "
           "without current. Weighs energy, losses and wear of the mix; each cycle must pass all the same",
           minimum=0.0, maximum=1.0, example="90", unit="%"),
    Column("repetitions per hour", "count", "in place of the share: how often the cycle runs in an hour of operation",
           positive=True, maximum=1.0e6),
    Column("cycles per minute", "count", "pace of this cycle; that of the axis table when empty", positive=True,
           maximum=1.0e6),
    Column("note", TEXT, "remark", example=""),
)  # fmt: skip

DUTY_TYPE_COLUMNS = (
    Column("cycle", TEXT, "name of the cycle that is made; rows of one name belong together (S8, S10)", required=True,
           example="hoist"),
    Column("duty type", WORDS, "S1 continuous; S2 short-time; S3 intermittent; S4 the same with starting; S5 the "
           "same with electric braking; S6 continuous with intermittent load; S8 related changes of load and speed, "
           "one row each; S10 discrete constant loads, one row and one cycle each", required=True, words=DUTY_TYPES,
           example="S5"),
    Column("speed", ("linear speed", "angular speed"), "signed speed under load; 0 only in S10", required=True,
           example=("0.1", "120"), unit=("m/s", "rpm")),
    Column("process force", ("force", "torque"), "force or torque of the load under way", default=0.0,
           assumed="no process effort", example=("0", "0"), unit=("N", "N·m"),
           aliases=("process torque", "process effort")),
    Column("payload", ("mass", "inertia"), "what is carried under load, and at rest (S3, S4, S5)",
           default=0.0, assumed="no payload",
           minimum=0.0, example=("12", "0.2"), unit=("kg", "kg·m²")),
    Column("operating time", "time", "time at this load and speed, starting and braking not counted", positive=True,
           maximum=1.0e7, example="8", unit="s"),
    Column("rest time", "time", "time at rest (S3, S4, S5) or without load (S6)", positive=True, maximum=1.0e7,
           unit="s"),
    Column("cyclic duration factor", "ratio", "time under load, starting and braking included, over the time of the "
           "cycle; in place of rest time or operating time. With neither, a cycle takes 10 min", positive=True,
           maximum=1.0, example="40", unit="%"),
    Column("starting time", "time", "time in which the speed is reached (S2, S4, S5, S8)", positive=True,
           maximum=1.0e5, example="0.5", unit="s"),
    Column("braking time", "time", "time of electric braking to rest (S2, S5)", positive=True, maximum=1.0e5,
           example="0.4", unit="s"),
    Column("brake closed", YES_NO, "whether the holding brake carries the load at rest", default="no",
           assumed="the motor holds", example="no"),
    Column("share of time", "ratio", "part of the operating time of each load of S10", minimum=0.0, maximum=1.0,
           unit="%"),
    Column("note", TEXT, "remark", example=""),
)  # fmt: skip
