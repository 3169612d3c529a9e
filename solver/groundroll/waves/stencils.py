"""Stencils that all row kernels share; indices are unsigned, see `kernels.py`; families in `access.py`."""

import numpy as np

from groundroll.waves.access import WORK, at, put
from groundroll.waves.jit import inline

U = np.uint64
ONE, TWO, THREE, FOUR = U(1), U(2), U(3), U(4)


@inline
def add(f, i, amount, family):
    """f[i] += amount."""
    put(f, i, at(f, i, family) + amount, family)


@inline
def to_half(f, i, s, c1, c2, c3, family):
    """c1 (f1 - f0) + c2 (f2 - f-1) + c3 (f3 - f-2), stride s: from nodes to the half point after i."""
    near = at(f, i + s, family) - at(f, i, family)
    next_ = at(f, i + TWO * s, family) - at(f, i - s, family)
    far = at(f, i + THREE * s, family) - at(f, i - TWO * s, family)
    return c1 * near + c2 * next_ + c3 * far


@inline
def to_node(f, i, s, c1, c2, c3, family):
    """The same from half points to node i."""
    near = at(f, i, family) - at(f, i - s, family)
    next_ = at(f, i + s, family) - at(f, i - TWO * s, family)
    far = at(f, i + TWO * s, family) - at(f, i - THREE * s, family)
    return c1 * near + c2 * next_ + c3 * far


@inline
def sum_rows(out, into, f, family, first, w, a, b, pitch):
    """out[i] = sum_t w[t] f[first + t pitch + i] for i in a..b-1: eight rows, weighted.

    `into` and `family`: what `out` and `f` belong to."""
    w0, w1, w2, w3, w4, w5, w6, w7 = w[0], w[1], w[2], w[3], w[4], w[5], w[6], w[7]
    for j in range(first + a, first + b):
        k = j + FOUR * pitch
        upper = w0 * at(f, j, family) + w1 * at(f, j + pitch, family)
        upper += w2 * at(f, j + TWO * pitch, family) + w3 * at(f, j + THREE * pitch, family)
        lower = w4 * at(f, k, family) + w5 * at(f, k + pitch, family)
        lower += w6 * at(f, k + TWO * pitch, family) + w7 * at(f, k + THREE * pitch, family)
        put(out, j - first, upper + lower, into)


@inline
def interpolate_rows(out, f, family, first, w, a, b, pitch):
    """out[i] = sum_t w[t] f[first + t pitch + i] into scratch: like `sum_rows`, with two taps more near a surface."""
    sum_rows(out, WORK, f, family, first, w, a, b, pitch)
    w8, w9 = w[8], w[9]
    if w8 != 0.0 or w9 != 0.0:
        j = first + U(8) * pitch
        for i in range(a, b):
            put(out, i, at(out, i, WORK) + w8 * at(f, j + i, family) + w9 * at(f, j + pitch + i, family), WORK)


@inline
def sum_columns(out, f, shift, w, a, b):
    """out[i] = sum_t w[t] f[i - shift + t] for i in a..b-1: eight columns, weighted; both are scratch."""
    w0, w1, w2, w3, w4, w5, w6, w7 = w[0], w[1], w[2], w[3], w[4], w[5], w[6], w[7]
    for i in range(a, b):
        j = i - shift
        k = j + FOUR
        left = w0 * at(f, j, WORK) + w1 * at(f, j + ONE, WORK) + w2 * at(f, j + TWO, WORK) + w3 * at(f, j + THREE, WORK)
        right = w4 * at(f, k, WORK) + w5 * at(f, k + ONE, WORK) + w6 * at(f, k + TWO, WORK) + w7 * at(f, k + THREE, WORK)
        put(out, i, left + right, WORK)
