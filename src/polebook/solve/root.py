"""Roots and maxima of one real variable, each inside a known bracket."""

from __future__ import annotations

from collections.abc import Callable

Function = Callable[[float], float]


def bracketed_root(f: Function, a: float, b: float, fa: float, fb: float, tolerance: float = 1e-13) -> float:
    """Root of f between a and b, where fa = f(a) and fb = f(b) differ in sign, to `tolerance` in the variable.

    Chandrupatla's choice between inverse quadratic interpolation and halving (T. R. Chandrupatla, A new hybrid
    quadratic/bisection algorithm, Advances in Engineering Software 28, 1997; from memory).
    """
    if fa == 0.0:
        return a
    if fb == 0.0:
        return b
    c, fc, t = a, fa, 0.5
    for _ in range(200):
        x = a + t * (b - a)
        fx = f(x)
        if (fx > 0) == (fa > 0):
            c, fc = a, fa
        else:
            c, b, fc, fb = b, a, fb, fa
        a, fa = x, fx
        best = a if abs(fa) < abs(fb) else b
        span = abs(b - a)
        if fx == 0.0 or span <= 2 * tolerance * max(1.0, abs(best)):
            return best
        xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
        if phi * phi < xi and (1 - phi) ** 2 < 1 - xi:
            t = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
        else:
            t = 0.5
        least = tolerance * max(1.0, abs(best)) / span
        t = min(1 - least, max(least, t))
    return best


def bracketed_maximum(f: Function, x: tuple[float, float, float], y: tuple[float, float, float]) -> tuple[float, float]:
    """(x, f(x)) of the maximum between x[0] and x[2], where y = f(x) and y[1] is not below y[0] and y[2].

    Steps to the vertex of the parabola through three points, by golden section where that does not help. The
    value is right to about the square of 1e-6 of the bracket.
    """
    (left, middle, right), (f_left, f_middle, f_right) = x, y
    width = right - left
    for _ in range(60):
        if right - left < 1e-6 * width:
            break
        p, q = (middle - left) * (f_middle - f_right), (middle - right) * (f_middle - f_left)
        curve = p - q
        vertex = middle - 0.5 * ((middle - left) * p - (middle - right) * q) / curve if curve else middle
        inside = left + 1e-3 * (right - left) < vertex < right - 1e-3 * (right - left)
        if abs(vertex - middle) < 1e-6 * width and inside and abs(right - left) < 0.5 * width:
            break
        if not inside or abs(vertex - middle) < 1e-6 * width:
            far = right - middle if right - middle > middle - left else left - middle
            vertex = middle + 0.3819660112501051 * far  # (3 - sqrt 5)/2 of the longer side
        f_vertex = f(vertex)
        if f_vertex > f_middle:
            if vertex > middle:
                left, f_left = middle, f_middle
            else:
                right, f_right = middle, f_middle
            middle, f_middle = vertex, f_vertex
        elif vertex > middle:
            right, f_right = vertex, f_vertex
        else:
            left, f_left = vertex, f_vertex
    return middle, f_middle
