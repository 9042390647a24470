"""A threshold stack worked out without any part of this project: Python's standard library only.

A 3.0 V detector of 2 %, 100 ppm/K over 25 K either way, behind a 1:1 divider of 1 % resistors; hysteresis between 3 %
and 8 %, typically 5 %. Prints threshold_stack.json.
"""
import itertools
import json
import math
import random

SEED, BOARDS = 20260101, 4_000_000
HALF_WIDTHS = (0.02, 0.01, 0.01, 100e-6 * 25)       # detector, top, bottom, temperature
LOW, MODE, HIGH = 0.03, 0.05, 0.08


def trip(detector, top, bottom, temperature):
    return 3.0 * (1 + detector) * (1 + temperature) * (1 + (1 + top) / (1 + bottom))


def summary(values):
    values.sort()
    mean = math.fsum(values) / len(values)
    variance = math.fsum((value - mean) ** 2 for value in values) / (len(values) - 1)
    quantiles = {str(p): values[int(p * len(values))] for p in (0.00135, 0.025, 0.975, 0.99865)}
    return {"mean": mean, "standard_deviation": math.sqrt(variance), "quantiles": quantiles}


corners = [trip(*c) for c in itertools.product(*((-h, h) for h in HALF_WIDTHS))]
worst = {
    "trip": [min(corners), max(corners)],
    "re_enable": [min(corners) * (1 + LOW), max(corners) * (1 + HIGH)],
    "hysteresis": [min(corners) * LOW, max(corners) * HIGH],
}
# To first order a 1:1 divider halves the tolerance of each of its resistors.
deviations = [6.0 * 0.02, 6.0 * 0.005, 6.0 * 0.005, 6.0 * 0.0025]
root_sum_square = math.sqrt(sum(d * d for d in deviations))

random.seed(SEED)
boards = {"trip": [], "re_enable": [], "hysteresis": []}
for _ in range(BOARDS):
    at = trip(*(random.uniform(-h, h) for h in HALF_WIDTHS))
    width = at * random.triangular(LOW, HIGH, MODE)
    for name, value in (("trip", at), ("re_enable", at + width), ("hysteresis", width)):
        boards[name].append(value)
print(json.dumps({
    "boards": BOARDS, "seed": SEED, "worst_case": worst,
    "trip_root_sum_square": root_sum_square,
    "trip_three_sigma": 3 * root_sum_square / math.sqrt(3),
    "monte_carlo": {name: summary(values) for name, values in boards.items()},
}, indent=1))
