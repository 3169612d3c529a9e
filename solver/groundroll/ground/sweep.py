"""Exact vertical means over cells of profiles made of uniform pieces."""

import numpy as np

from groundroll.waves.jit import kernel

SLIVER = 1e-9
"""Share of a cell's height below which an overlap is taken for rounding."""


def column_means(
    surface: np.ndarray, top: np.ndarray, fields: np.ndarray, edges: np.ndarray
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Means of piecewise constant fields between the edges of each column.

    `surface` (m,), `top` (m, n), `fields` (f, m, n), `edges` (m, nz+1), z in m. Returns means (f, m, nz) and the
    first and last piece of each cell (m, nz). Cells are cut at the surface; one of no height takes the piece there.
    """
    count, columns, cells = len(fields), len(top), edges.shape[1] - 1
    means = np.empty((count, columns, cells))
    first = np.empty((columns, cells), dtype=np.int64)
    last = np.empty((columns, cells), dtype=np.int64)
    _sweep(surface, np.ascontiguousarray(top), fields, np.ascontiguousarray(edges), means, first, last)
    return means, first, last


@kernel
def _sweep(surface, top, fields, edges, means, first, last):
    pieces = top.shape[1]
    for c in range(top.shape[0]):
        j = 0
        for k in range(edges.shape[1] - 1):
            upper = max(edges[c, k], surface[c])
            lower = max(edges[c, k + 1], surface[c])
            sliver = SLIVER * (edges[c, k + 1] - edges[c, k])
            while j + 1 < pieces and top[c, j + 1] <= upper + sliver:
                j += 1
            end = j
            while end + 1 < pieces and top[c, end + 1] < lower - sliver:
                end += 1
            if _alike(c, j, end, top, fields):
                end = j
            _mean(c, k, j, end, upper, lower, top, fields, means)
            first[c, k], last[c, k] = j, end


@kernel
def _alike(c, begin, end, top, fields):
    """Whether pieces begin to end hold the same values, those of no thickness aside."""
    for j in range(begin + 1, end + 1):
        if j == end or top[c, j + 1] > top[c, j]:
            for f in range(fields.shape[0]):
                if fields[f, c, j] != fields[f, c, begin]:
                    return False
    return True


@kernel
def _mean(c, k, begin, end, upper, lower, top, fields, means):
    for f in range(fields.shape[0]):
        means[f, c, k] = fields[f, c, begin] if begin == end else 0.0
    if begin == end:
        return
    for j in range(begin, end + 1):
        a = upper if j == begin else top[c, j]
        b = lower if j == end else top[c, j + 1]
        if b > a:
            for f in range(fields.shape[0]):
                means[f, c, k] += (b - a) / (lower - upper) * fields[f, c, j]
