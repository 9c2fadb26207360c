"""Whether a mechanism can make a recorded motion: where it leaves the geometry, and what the load cannot do."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from actuator_sizing.case.measured_samples import MEASURED
from actuator_sizing.case.measuring import UnderstoodRecording, between_knots
from actuator_sizing.case.mechanics import out_of_reach
from actuator_sizing.case.problem_list import ProblemList
from actuator_sizing.case.recording import RECORDED_PROCESS, Recording
from actuator_sizing.core.mechanisms import Mechanism
from actuator_sizing.errors import NOTE

FloatArray = NDArray[np.float64]


def check_recorded_motion(
    mechanism: Mechanism, at_shaft: bool, understood: UnderstoodRecording, problems: ProblemList
) -> None:
    """Report where a recorded motion leaves the geometry or asks for what the load cannot do.

    Parameters
    ----------
    mechanism : Mechanism
        Geometry without contradictions.
    at_shaft : bool
        The motion is that of the driven shaft.
    understood : UnderstoodRecording
        The record.
    problems : ProblemList
        Takes one problem, with the row of the sample.
    """
    recording = understood.recording
    if recording.at_rest:
        return
    t = between_knots(recording.motion)
    q, dq, ddq = recording.motion_at(t)
    low, high = mechanism.reach(at_shaft)
    outside = (q < low) | (q > high)
    if outside.any():
        instant = float(t[outside][0])
        complaint = out_of_reach(mechanism, at_shaft, q, low, high)
        problems.report(MEASURED, understood.row_at(instant), got=complaint.got, allowed=complaint.allowed,
                        remedy="Correct the record or the geometry: positions count from the first sample, where "
                        "the mechanism stands as the axis table says.")  # fmt: skip
        return
    _report_torque_effect(mechanism, at_shaft, understood, problems)
    if type(mechanism).motion_complaints is Mechanism.motion_complaints:
        return  # this mechanism follows every motion
    geometry = mechanism.transfer(q, at_shaft)
    v = geometry.load_rate * dq
    a = geometry.load_rate * ddq + geometry.load_bend * dq**2
    payload = recording.payload_at(t).min(axis=1)
    for process in _process_extremes(recording, len(t)):
        for k in range(len(t)):
            found = mechanism.motion_complaints(
                geometry.position[k], v[k], a[k], float(payload[k]), float(process[k])
            )
            for complaint in found:
                problems.report(MEASURED, understood.row_at(float(t[k, 0])), complaint.quantity,
                                got=complaint.got, allowed=complaint.allowed, remedy=complaint.remedy,
                                severity=complaint.severity)  # fmt: skip
                return


def _report_torque_effect(
    mechanism: Mechanism, at_shaft: bool, understood: UnderstoodRecording, problems: ProblemList
) -> None:
    """Say what the cut-off decides at the driven shaft, where the torque there is computed from the motion."""
    recording = understood.recording
    if recording.kind != RECORDED_PROCESS:
        return
    parts = []
    low, high = mechanism.reach(at_shaft)
    for frequency, motion in understood.fits:
        t = between_knots(motion)
        q, dq, ddq = motion.kinematics(t)
        if np.any((q < low) | (q > high)):
            continue  # of another cut-off than the stated one, which was checked
        geometry = mechanism.transfer(q, at_shaft)
        v = geometry.load_rate * dq
        a = geometry.load_rate * ddq + geometry.load_bend * dq**2
        speed = geometry.shaft_rate * dq
        inertia, gravity = mechanism.shaft_torques(
            geometry, speed, geometry.shaft_rate * ddq + geometry.shaft_bend * dq**2
        )
        efforts = mechanism.efforts(
            geometry.position, v, a, np.sign(v), recording.payload_at(t), recording.effort_at(t)
        )
        torque = efforts.total * geometry.lever + inertia + gravity
        rms, peak = float(np.sqrt(np.mean(torque[:, :-1] ** 2))), float(np.abs(torque).max())
        parts.append(f"{rms:.4g} and {peak:.4g} at {frequency:g} Hz")
    unit = "N" if mechanism.drives_linear_motor else "N·m"
    problems.report(MEASURED, None, got=f"torque at the driven shaft (RMS and peak, without losses) in {unit} "
                    + "; ".join(parts), allowed="figures that hardly depend on the cut-off",
                    remedy="Where they do, choose the cut-off with care: it decides the motor.",
                    severity=NOTE)  # fmt: skip


def _process_extremes(recording: Recording, count: int) -> tuple[FloatArray, ...]:
    """Smallest and largest process effort in each interval between knots; nothing where none is recorded."""
    if recording.kind != RECORDED_PROCESS or not recording.effort.any():
        return (np.zeros(count),)
    edges = recording.motion.knots_s
    at_edges = recording.effort_at(edges)
    low, high = np.minimum(at_edges[:-1], at_edges[1:]), np.maximum(at_edges[:-1], at_edges[1:])
    knot = np.clip(np.searchsorted(edges, recording.time_s, side="right") - 1, 0, count - 1)
    np.minimum.at(low, knot, recording.effort)
    np.maximum.at(high, knot, recording.effort)
    return low, high
