"""Stencils that all row kernels share; indices are unsigned, see `kernels.py`."""

import numpy as np

from groundroll.waves.jit import inline, kernel

U = np.uint64
ONE, TWO, THREE, FOUR = U(1), U(2), U(3), U(4)


@inline
def to_half(f, i, s, c1, c2, c3):
    """c1 (f1 - f0) + c2 (f2 - f-1) + c3 (f3 - f-2), stride s: from nodes to the half point after i."""
    return c1 * (f[i + s] - f[i]) + c2 * (f[i + TWO * s] - f[i - s]) + c3 * (f[i + THREE * s] - f[i - TWO * s])


@inline
def to_node(f, i, s, c1, c2, c3):
    """The same from half points to node i."""
    return c1 * (f[i] - f[i - s]) + c2 * (f[i + s] - f[i - TWO * s]) + c3 * (f[i + TWO * s] - f[i - THREE * s])


@kernel
def sum_rows(out, f, first, w, a, b, pitch):
    """out[i] = sum_t w[t] f[first + t pitch + i] for i in a..b-1: eight rows, weighted."""
    w0, w1, w2, w3, w4, w5, w6, w7 = w[0], w[1], w[2], w[3], w[4], w[5], w[6], w[7]
    for j in range(first + a, first + b):
        k = j + FOUR * pitch
        upper = w0 * f[j] + w1 * f[j + pitch] + w2 * f[j + TWO * pitch] + w3 * f[j + THREE * pitch]
        lower = w4 * f[k] + w5 * f[k + pitch] + w6 * f[k + TWO * pitch] + w7 * f[k + THREE * pitch]
        out[j - first] = upper + lower


@kernel
def interpolate_rows(out, f, first, w, a, b, pitch):
    """out[i] = sum_t w[t] f[first + t pitch + i]: like `sum_rows`, with two taps more near a surface."""
    sum_rows(out, f, first, w, a, b, pitch)
    w8, w9 = w[8], w[9]
    if w8 != 0.0 or w9 != 0.0:
        j = first + U(8) * pitch
        for i in range(a, b):
            out[i] += w8 * f[j + i] + w9 * f[j + pitch + i]


@kernel
def sum_columns(out, f, shift, w, a, b):
    """out[i] = sum_t w[t] f[i - shift + t] for i in a..b-1: eight columns, weighted."""
    w0, w1, w2, w3, w4, w5, w6, w7 = w[0], w[1], w[2], w[3], w[4], w[5], w[6], w[7]
    for i in range(a, b):
        j = i - shift
        left = w0 * f[j] + w1 * f[j + ONE] + w2 * f[j + TWO] + w3 * f[j + THREE]
        k = j + FOUR
        right = w4 * f[k] + w5 * f[k + ONE] + w6 * f[k + TWO] + w7 * f[k + THREE]
        out[i] = left + right
