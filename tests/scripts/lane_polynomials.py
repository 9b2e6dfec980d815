"""Prints the coefficients of src/numeric/lanes.rs.

    python tests/scripts/lane_polynomials.py

Each polynomial interpolates its function at Chebyshev nodes, in decimal
arithmetic of 60 digits; the printed error is the largest on a fine grid, as a
share of the function that is wanted. Needs the standard library only.

ln: with s = (m - 1)/(m + 1) and z = s^2, ln m = 2 s (1 + z Q(z)),
    Q(z) = 1/3 + z/5 + z^2/7 + ..., for m from sqrt(1/2) to sqrt(2).
exp: e^x = 1 + x + x^2 P(x), P(x) = 1/2! + x/3! + x^2/4! + ...,
    for |x| to ln(2)/2.
"""

import math
from decimal import Decimal, getcontext

getcontext().prec = 60


def series(coefficient, x):
    """Sum of coefficient(k) x^k until it no longer changes."""
    total, power, k = Decimal(0), Decimal(1), 0
    while True:
        before, total = total, total + coefficient(k) * power
        if total == before and k > 0:
            return total
        power, k = power * x, k + 1


def q(z):
    return series(lambda k: 1 / Decimal(2 * k + 3), z)


def p(x):
    return series(lambda k: 1 / Decimal(math.factorial(k + 2)), x)


def interpolate(f, low, high, degree):
    """Coefficients, ascending, of the polynomial through f at Chebyshev nodes."""
    n = degree + 1
    nodes = [
        (low + high) / 2 + (high - low) / 2 * Decimal(math.cos(math.pi * (k + 0.5) / n))
        for k in range(n)
    ]
    slopes = [f(x) for x in nodes]
    for order in range(1, n):
        for k in range(n - 1, order - 1, -1):
            slopes[k] = (slopes[k] - slopes[k - 1]) / (nodes[k] - nodes[k - order])
    coefficients = [Decimal(0)] * n
    for slope, node in zip(reversed(slopes), reversed(nodes)):
        shifted = [Decimal(0)] + coefficients[:-1]
        coefficients = [a - node * b for a, b in zip(shifted, coefficients)]
        coefficients[0] += slope
    return coefficients


def value(coefficients, x):
    total = Decimal(0)
    for c in reversed(coefficients):
        total = total * x + c
    return total


def show(name, f, low, high, degree, share):
    # rounded first: the error is that of the numbers as they are used
    rounded = [float(c) for c in interpolate(f, low, high, degree)]
    exact = [Decimal(c) for c in rounded]
    grid = [low + (high - low) * k / 4000 for k in range(4001)]
    worst = max(abs((value(exact, x) - f(x)) * share(x)) for x in grid)
    print(f"{name}: largest error {float(worst):.1e}")
    for c in rounded:
        print(f"    {c!r}")


def main():
    root = Decimal(2).sqrt()
    largest = ((root - 1) / (root + 1)) ** 2
    show("ln", q, Decimal(0), largest, 6, lambda z: z / (1 + z * q(z)))
    ln2 = Decimal(2).ln()
    half = ln2 / 2
    show("exp", p, -half, half, 9, lambda x: x * x / x.exp())
    # the leading part times a whole number below 2^11 is exact
    leading = Decimal(int(ln2 * 2**42)) / 2**42
    print(f"ln 2: {float(leading)!r} + {float(ln2 - leading)!r}")
    print(f"1/ln 2: {float(1 / ln2)!r}")
    print(f"sqrt(1/2): {float(1 / root).hex()}")


if __name__ == "__main__":
    main()
