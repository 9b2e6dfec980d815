"""Fits the Redlich-Kister set of tests/data/pairs/excess_volume.csv.

Densities of ethanol (1) and water (2) at 25 degC by mass percent of ethanol: US National Bureau of
Standards, as in Perry's Chemical Engineers' Handbook, table of densities of aqueous ethyl alcohol (from
memory). Even tens and the outermost rows are fitted, the odd fives left for the test:
tests/data/pairs/ethanol_water_density.csv.
"""

import numpy as np

DENSITY_G_PER_ML = dict(zip(range(0, 101, 5), [
    0.99708, 0.98817, 0.98043, 0.97334, 0.96639, 0.95895, 0.95067, 0.94146, 0.93148, 0.92085, 0.90985,
    0.89850, 0.88699, 0.87527, 0.86340, 0.85134, 0.83911, 0.82660, 0.81362, 0.79991, 0.78506,
]))
ETHANOL, WATER = 46.068, 18.015
FITTED = [5, *range(10, 91, 10), 95]


def excess(percent):
    w = percent / 100
    x = (w / ETHANOL) / (w / ETHANOL + (1 - w) / WATER)
    volume = (x * ETHANOL + (1 - x) * WATER) / DENSITY_G_PER_ML[percent]
    pure = x * ETHANOL / DENSITY_G_PER_ML[100] + (1 - x) * WATER / DENSITY_G_PER_ML[0]
    return x, volume - pure


points = [excess(percent) for percent in FITTED]
terms = np.array([[x * (1 - x) * (2 * x - 1) ** k for k in range(6)] for x, _ in points])
fit = np.linalg.lstsq(terms, np.array([v for _, v in points]), rcond=None)[0]
print("a0 to a5 in cm3/mol:", *np.round(fit, 3))
print("mass_percent,density")
for percent in range(15, 90, 10):
    print(f"{percent},{DENSITY_G_PER_ML[percent]}")
