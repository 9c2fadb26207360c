"""One set with everything that its curves and quantities are made from."""

from __future__ import annotations

from actuator_sizing.case.model import Case
from actuator_sizing.core.machine import JudgedMotor, judge, model_voltage
from actuator_sizing.core.parameters import GearheadParameters, MotorParameters
from actuator_sizing.core.step_response import StepResponse, voltage_step
from actuator_sizing.core.thermal import HeatLoss, ThermalNetwork
from actuator_sizing.sizing.demand import Demand
from actuator_sizing.sizing.derating import derated_drives
from actuator_sizing.sizing.pair_course import PairCourse, course, heat_loss
from actuator_sizing.sizing.thermal_data import thermal_network


class SetModel:
    """One set with its course over the cycle; what the curves are drawn from."""

    def __init__(self, case: Case, demand: Demand, motor: int, gearhead: int, drive: int):
        """Take the three parts by their index in the catalogs."""
        self.case, self.demand, self.parts = case, demand, (motor, gearhead, drive)
        self.motor: MotorParameters = case.motor_parameters.take(slice(motor, motor + 1))
        self.gearhead: GearheadParameters = case.gearhead_parameters.take(slice(gearhead, gearhead + 1))
        self.drive = derated_drives(case).take(slice(drive, drive + 1))
        self.judged: JudgedMotor = judge(self.motor, case.surroundings)
        self.course: PairCourse = course(demand, self.motor, self.gearhead, self.judged)

    @property
    def in_time(self) -> SetModel:
        """The set over the cycle in the order of time, for drawings; itself unless a record was condensed."""
        return self if self.demand.drawn is None else SetModel(self.case, self.demand.drawn, *self.parts)

    @property
    def network(self) -> ThermalNetwork:
        """Thermal network of the motor."""
        return thermal_network(self.motor, self.case.surroundings)

    @property
    def loss(self) -> HeatLoss:
        """Heat losses over the cycle."""
        return heat_loss(self.demand, self.motor, self.gearhead, self.judged, self.course)

    @property
    def total_inertia(self) -> float:
        """Rotor, gearhead and reflected load at the motor shaft. [kg·m²]"""
        reflected = self.demand.load_inertia / self.gearhead.ratio[0] ** 2
        return float(self.motor.rotor_inertia_kg_m2[0] + self.gearhead.inertia_kg_m2[0] + reflected)

    def step(self) -> StepResponse:
        """Voltage step of motor plus load at nominal bus, friction and gravity left out."""
        voltage = model_voltage(
            self.case.surroundings.bus_nominal_v,
            self.case.surroundings.modulation_limit,
            self.motor.current_basis,
        )
        return voltage_step(
            resistance_ohm=float(self.judged.resistance_ohm[0]),
            inductance_h=float(self.judged.inductance_h[0]),
            torque_constant=float(self.judged.torque_constant_nm_per_a[0]),
            inertia=self.total_inertia,
            viscous=float(self.motor.viscous_friction_nm_s[0]),
            voltage=float(voltage[0]),
        )
