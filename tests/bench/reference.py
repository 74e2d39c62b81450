"""Case C of the benchmarks, water through a bake, by the method of lines with scipy's BDF.

An independent solution to measure against: unknown ln p, one equation per node, backward differentiation of variable
order. Prints one JSON object: seconds of the solution alone and the pressures at both ends at 480 h.
Usage: python3 reference.py CELLS RTOL
"""

import json
import sys
import time

import numpy as np
from scipy.integrate import solve_ivp
from scipy.sparse import diags

BOLTZMANN = 1.380649e-23
GAS = 8.31446261815324
MASS = 18.01528e-3 / 6.02214076e23
ROOM, HOT = 293.15, 353.15
HOUR = 3600.0
LENGTH, DIAMETER, SPEED = 150.0, 1.2, 2.0
LOW, HIGH, SITES = 60e3, 110e3, 5e19

cells, rtol = int(sys.argv[1]), float(sys.argv[2])
dx = LENGTH / cells
weight = np.full(cells + 1, dx)
weight[[0, -1]] /= 2
volume = weight * np.pi * DIAMETER**2 / 4
wall = weight * np.pi * DIAMETER

ramp = (HOT - ROOM) / 5 * HOUR
corners = np.cumsum([0.0, 24 * HOUR, ramp, 240 * HOUR, ramp])
corners = np.append(corners, 480 * HOUR)
kelvins = [ROOM, ROOM, HOT, HOT, ROOM, ROOM]


def share(u):
    return 0.5 * (1 + np.tanh(u / 2))


def slopes(t, y, rate):
    kelvin = np.interp(t, corners, kelvins)
    p = np.exp(y)
    energy = GAS * kelvin
    log_scale = np.log(1e19 * 1e13 * np.sqrt(2 * np.pi * MASS * BOLTZMANN * kelvin))
    low, high = LOW / energy + y - log_scale, HIGH / energy + y - log_scale
    width = energy / (HIGH - LOW)
    theta = width * (np.logaddexp(0, high) - np.logaddexp(0, low))
    by_log = width * (share(high) - share(low))
    fall_low, fall_high = (LOW / energy + 0.5) / kelvin, (HIGH / energy + 0.5) / kelvin
    by_kelvin = theta / kelvin - width * (share(high) * fall_high - share(low) * fall_low)
    speed = np.sqrt(8 * BOLTZMANN * kelvin / (np.pi * MASS))
    flux = np.pi * DIAMETER**3 * speed / 12 / dx * (p[:-1] - p[1:]) / (BOLTZMANN * kelvin)
    into = np.zeros_like(p)
    into[:-1] -= flux
    into[1:] += flux
    into[0] -= SPEED * p[0] / (BOLTZMANN * kelvin)
    gas = volume * p / (BOLTZMANN * kelvin)
    into += rate * (gas / kelvin - wall * SITES * by_kelvin)
    return into / (gas + wall * SITES * by_log)


pattern = diags([np.ones(cells), np.ones(cells + 1), np.ones(cells)], [-1, 0, 1]).tocsc()
y = np.full(cells + 1, np.log(1e-3))
started = time.perf_counter()
for k in range(len(corners) - 1):
    start, end = corners[k], corners[k + 1]
    rate = (kelvins[k + 1] - kelvins[k]) / (end - start)
    part = solve_ivp(
        slopes, (start, end), y, method="BDF", args=(rate,), rtol=rtol, atol=rtol, jac_sparsity=pattern, first_step=1e-3
    )
    if not part.success:
        raise RuntimeError(part.message)
    y = part.y[:, -1]
seconds = time.perf_counter() - started
print(json.dumps({"seconds": seconds, "near": float(np.exp(y[0])), "far": float(np.exp(y[-1]))}))
