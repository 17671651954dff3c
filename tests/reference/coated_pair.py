"""Two coated wires in air by collocation of charges after Clements, Paul and Adams (1975).

Another formulation than the engine's: Fourier series of the charge on the metal (free and bound) and on
the outside of the coat (bound), the potential enforced at points of the metal and the normal displacement
at points of the coat. Prints pF/m over the number of harmonics; the last column stands in
tests/engine/capacitance_test.cpp. Run: /usr/bin/python3 coated_pair.py
"""

import numpy

EPSILON_0 = 8.8541878128e-12  # F/m


def potential(x, y, radius, k):
    """V per C/m2 of cos(k t) on a circle around the origin."""
    rho, t = numpy.hypot(x, y), numpy.arctan2(y, x)
    if k == 0:
        return -radius / EPSILON_0 * numpy.log(numpy.maximum(rho, radius))
    outside = rho >= radius * (1 - 1e-12)
    shape = numpy.where(outside, radius ** (k + 1) / rho**k, rho**k / radius ** (k - 1))
    return shape / (2 * EPSILON_0 * k) * numpy.cos(k * t)


def field(x, y, radius, k, inside):
    """V/m, x and y parts, of the same charge."""
    rho, t = numpy.hypot(x, y), numpy.arctan2(y, x)
    if k == 0:
        radial, around = (0 * rho if inside else radius / (EPSILON_0 * rho)), 0 * rho
    else:
        shape = ((rho / radius) ** (k - 1) if inside else (radius / rho) ** (k + 1)) / (2 * EPSILON_0)
        radial, around = (-shape if inside else shape) * numpy.cos(k * t), shape * numpy.sin(k * t)
    return radial * numpy.cos(t) - around * numpy.sin(t), radial * numpy.sin(t) + around * numpy.cos(t)


def coated_pair(radius, outer, spacing, permittivity, harmonics):
    """F/m. The wires stand at +-1/2 V, so the second one's charges are the first one's, mirrored and negative."""
    n = harmonics + 1
    t = (numpy.arange(n) + 0.5) * numpy.pi / n
    cos, sin = numpy.cos(t), numpy.sin(t)
    matrix, right = numpy.zeros((2 * n, 2 * n)), numpy.repeat([0.5, 0.0], n)
    for s, r in enumerate((radius, outer)):
        for k in range(n):
            x, y = radius * cos, radius * sin
            matrix[:n, s * n + k] = potential(x, y, r, k) - potential(spacing - x, y, r, k)
            x, y = outer * cos, outer * sin
            mirrored = field(spacing - x, y, r, k, False)
            other = mirrored[0] * cos - mirrored[1] * sin
            within, beyond = (
                field(x, y, r, k, inside)[0] * cos + field(x, y, r, k, inside)[1] * sin + other
                for inside in (s == 1, False))
            matrix[n:, s * n + k] = EPSILON_0 * (permittivity * within - beyond)
    scale = numpy.abs(matrix).max(0)
    charge = numpy.linalg.solve(matrix / scale, right) / scale
    return 2 * numpy.pi * (radius * charge[0] + outer * charge[n])


if __name__ == "__main__":
    INCH = 25.4e-3  # m
    for spacing in (0.105, 0.13):
        for permittivity in (3.5, 4.5, 5.5, 7.0):
            values = [1e12 * coated_pair(0.032 * INCH, 0.051 * INCH, spacing * INCH, permittivity, n)
                      for n in (8, 14, 20, 30, 40, 60)]
            print(f"spacing {spacing} in, permittivity {permittivity}: " + " ".join(f"{v:.4f}" for v in values))
