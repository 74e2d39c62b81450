"""The benchmark cases by the method of lines with scipy's BDF: an independent solution to measure against.

Same nodes and same balances as our own solver, integrated by backward differentiation of variable order. Reads one
JSON request a line, {"case": "B1" or "C", "cells": n, "rtol": r, "outputs": [s, ...]}, and answers each with one line:
seconds of the solution alone, and the pressures of every node at every output.
"""

import json
import sys
import time

import numpy as np
import scipy
from scipy.integrate import solve_ivp
from scipy.sparse import diags

BOLTZMANN = 1.380649e-23
GAS = 8.31446261815324
MASS = 18.01528e-3 / 6.02214076e23
ROOM, HOT = 293.15, 423.15
HOUR = 3600.0
LOW, HIGH, SITES = 60e3, 110e3, 5e19


def mesh(length, diameter, cells):
    weight = np.full(cells + 1, length / cells)
    weight[[0, -1]] /= 2
    return weight * np.pi * diameter**2 / 4, weight * np.pi * diameter


def specific(diameter, kelvin):
    return np.pi * diameter**3 / 12 * np.sqrt(8 * BOLTZMANN * kelvin / (np.pi * MASS))


def wide_tube(cells, rtol, outputs):
    """B1: 2 km of 1 m tube, water falling as 1/t, eight pumps. Linear: BDF is given the constant Jacobian."""
    length, diameter, speed = 2000.0, 1.0, 1.5
    dx = length / cells
    volume, wall = mesh(length, diameter, cells)
    link = specific(diameter, ROOM) / dx
    pumps = np.rint((125 + 250 * np.arange(8)) / dx).astype(int)
    middle = np.full(cells + 1, -2 * link)
    middle[[0, -1]] = -link
    middle[pumps] -= speed
    side = np.full(cells, link)
    jacobian = diags([side / volume[1:], middle / volume, side / volume[:-1]], [-1, 0, 1]).tocsc()
    release = wall * 3e-6 * HOUR / volume

    def slopes(t, p):
        return jacobian @ p + release / t

    part = solve_ivp(
        slopes,
        (HOUR, outputs[-1]),
        np.full(cells + 1, 1e-3),
        method="BDF",
        t_eval=outputs,
        rtol=rtol,
        atol=rtol * 1e-8,
        jac=jacobian,
        first_step=1e-3,
    )
    if not part.success:
        raise RuntimeError(part.message)
    return part.y.T


def baked_water(cells, rtol, outputs):
    """C, water: 150 m of 1.2 m tube through a bake. Unknown ln p; the Jacobian by differences on its sparsity."""
    length, diameter, speed = 150.0, 1.2, 2.0
    dx = length / cells
    volume, wall = mesh(length, diameter, cells)
    ramp = (HOT - ROOM) / 5 * HOUR
    corners = np.append(np.cumsum([0.0, 24 * HOUR, ramp, 240 * HOUR, ramp]), 480 * HOUR)
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
        flux = specific(diameter, kelvin) / dx * (p[:-1] - p[1:]) / (BOLTZMANN * kelvin)
        into = np.zeros_like(p)
        into[:-1] -= flux
        into[1:] += flux
        into[0] -= speed * p[0] / (BOLTZMANN * kelvin)
        gas = volume * p / (BOLTZMANN * kelvin)
        into += rate * (gas / kelvin - wall * SITES * by_kelvin)
        return into / (gas + wall * SITES * by_log)

    pattern = diags([np.ones(cells), np.ones(cells + 1), np.ones(cells)], [-1, 0, 1]).tocsc()
    y = np.full(cells + 1, np.log(1e-3))
    rows = []
    for k in range(len(corners) - 1):
        start, end = corners[k], corners[k + 1]
        wanted = [t for t in outputs if start < t <= end]
        part = solve_ivp(
            slopes,
            (start, end),
            y,
            method="BDF",
            t_eval=sorted({*wanted, end}),
            args=((kelvins[k + 1] - kelvins[k]) / (end - start),),
            rtol=rtol,
            atol=rtol,
            jac_sparsity=pattern,
            first_step=1e-3,
        )
        if not part.success:
            raise RuntimeError(part.message)
        rows += [np.exp(part.y[:, i]) for i, t in enumerate(part.t) if t in wanted]
        y = part.y[:, -1]
    return np.array(rows)


print(json.dumps({"scipy": scipy.__version__}), flush=True)
for line in sys.stdin:
    asked = json.loads(line)
    solve = {"B1": wide_tube, "C": baked_water}[asked["case"]]
    started = time.perf_counter()
    pressures = solve(asked["cells"], asked["rtol"], asked["outputs"])
    seconds = time.perf_counter() - started
    print(json.dumps({"seconds": seconds, "pressurePa": pressures.tolist()}), flush=True)
