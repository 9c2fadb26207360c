"""Thermal networks and losses for tests, and the cycle map by matrix exponentials."""

import math

import numpy as np
from scipy.linalg import expm

from actuator_sizing.core.thermal import HeatLoss, ThermalNetwork

NAN = math.nan
ALPHA = 1.0 / 255.0  # copper at 20 °C
AMBIENT = 40.0


def network(R_1=1.0, R_2=2.0, C_1=25.0, C_2=1200.0, count=1):
    return ThermalNetwork(*(np.full(count, float(value)) for value in (R_1, R_2, C_1, C_2)))


def losses(duration, copper, speed=0.0, alpha=0.0, beta=0.0, reference=20.0, magnet_reference=20.0):
    copper = np.atleast_2d(np.asarray(copper, dtype=float))
    column = [np.full(len(copper), float(value)) for value in (alpha, reference, beta, magnet_reference)]
    return HeatLoss(
        np.asarray(duration, dtype=float), copper, np.broadcast_to(speed, copper.shape) + 0.0, *column
    )


def random_losses(count=1, pieces=9, seed=1, **kinds):
    random = np.random.default_rng(seed)
    copper = random.uniform(0.0, 40.0, (count, pieces))
    copper[:, ::4] = 0.0
    return losses(
        random.uniform(0.2, 5.0, pieces), copper, speed=random.uniform(0.0, 5.0, (count, pieces)), **kinds
    )


def affine_cycle(net, loss):
    """Cycle map of candidate 0 without magnet term from 3x3 matrix exponentials: (M, F(ambient) offset)."""
    R_1, R_2 = net.winding_resistance_k_w[0], net.housing_resistance_k_w[0]
    C_1, C_2 = net.winding_capacity_j_k[0], net.housing_capacity_j_k[0]
    alpha, reference = loss.resistance_coefficient_per_k[0], loss.resistance_reference_degc[0]
    whole = np.eye(3)
    for h, q, p in zip(loss.duration_s, loss.copper_loss_w[0], loss.speed_loss_w[0], strict=True):
        A = np.zeros((3, 3))
        A[0] = [
            (q * alpha - 1 / R_1) / C_1,
            1 / (R_1 * C_1),
            q * (1.0 + alpha * (AMBIENT - reference)) / C_1,
        ]
        A[1] = [1 / (R_1 * C_2), -(1 / R_1 + 1 / R_2) / C_2, p / C_2]
        whole = expm(A * h) @ whole
    return whole[:2, :2], whole[:2, 2]
