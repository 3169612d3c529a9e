"""One-dimensional derivative operators with the energy-stable closure at an edge.

The closure (norms HA of the node rows and HB of the half rows, trace l, matrix Q) is read from
``surface_closure.json``. With e0 the unit vector of the node on the edge:

    Dh = HB^-1 Q                  node -> half        Dn = HA^-1 (-Q^T - e0 l^T)   half -> node
    Ah = HB^-1 (Q + l e0^T)       node -> half        An = -HA^-1 Q^T              half -> node

so that <v, HB Ah s> + <Dn v, HA s> = 0 and <v, HA An s> + <Dh v, HB s> = 0 to rounding: work done by
stress equals the change of strain energy. Summation by parts on staggered grids: O'Reilly,
Lundquist, Dunham & Nordstrom 2017, J. Comput. Phys. 346, 572; these coefficients were tuned for
Rayleigh waves by us.

Which pair serves an edge:
    free    strain Dn, Dh; momentum An, Dh (the traction on the edge is held, so Ah = Dh there)
    sloped  strain Dn, Dh; momentum An, Ah (a free surface under terrain: the traction is free, not held)
    rigid   strain An, Dh; momentum Dn, Dh (velocity on the edge is held at zero)
    absorb  the interior stencil cut off at the mesh: its own negative adjoint with unit norms
"""

import json
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np

from groundroll.waves.cell import (
    HALF_MOMENTUM,
    HALF_STRAIN,
    INTERIOR,
    OPERATORS,
)

TAPS = 8
CLOSED_NODES, CLOSED_HALVES = 6, 5
_EXTENT = 20


@dataclass(frozen=True)
class Closure:
    """The closure at an edge; matrices are (row, column), counted inward from the edge.

    `dh`, `ah`: the first CLOSED_HALVES rows, `dn`, `an`: the first CLOSED_NODES rows; TAPS columns
    each, spacing 1. `node_norm`, `half_norm`: HA and HB of the same rows (1 further in).
    `trace`: value of a half-row field on the edge, four weights.
    """

    dh: np.ndarray
    dn: np.ndarray
    ah: np.ndarray
    an: np.ndarray
    node_norm: np.ndarray
    half_norm: np.ndarray
    trace: np.ndarray


def interior_matrix(n: int) -> np.ndarray:
    """Return the (n, n) node -> half interior derivative, row j between nodes j and j + 1, cut off."""
    matrix = np.zeros((n, n))
    for reach, c in enumerate(INTERIOR):
        matrix += c * (np.eye(n, k=1 + reach) - np.eye(n, k=-reach))
    return matrix


@cache
def closure() -> Closure:
    """Read the closure and build its four operators in double precision."""
    table = json.loads(Path(__file__).with_name("surface_closure.json").read_text())
    n = _EXTENT
    q = interior_matrix(n)
    block = np.array(table["Q_half_rows_0_4_nodal_columns_0_5"])
    q[: block.shape[0], : block.shape[1]] = block
    ha, hb, trace = np.ones(n), np.ones(n), np.zeros(n)
    ha[: len(table["nodal_norm"])] = table["nodal_norm"]
    hb[: len(table["half_norm"])] = table["half_norm"]
    trace[: len(table["surface_trace"])] = table["surface_trace"]
    e0 = np.eye(n)[0]
    nodes, halves = (slice(CLOSED_NODES), slice(TAPS)), (slice(CLOSED_HALVES), slice(TAPS))
    return Closure(
        dh=(q / hb[:, None])[halves],
        dn=((-q.T - np.outer(e0, trace)) / ha[:, None])[nodes],
        ah=((q + np.outer(trace, e0)) / hb[:, None])[halves],
        an=(-q.T / ha[:, None])[nodes],
        node_norm=ha[:CLOSED_NODES],
        half_norm=hb[:CLOSED_HALVES],
        trace=trace[:4],
    )


def edge_operators(condition: str) -> tuple[np.ndarray, ...]:
    """Return the closed rows of the four operators (order of `OPERATORS`) at an edge."""
    c = closure()
    if condition == "free":
        return c.dn, c.dh, c.an, c.dh
    if condition == "sloped":
        return c.dn, c.dh, c.an, c.ah
    if condition == "rigid":
        return c.an, c.dh, c.dn, c.dh
    raise ValueError(condition)


@dataclass(frozen=True)
class Line:
    """The four operators along one axis of `n` nodes, row by row, spacing 1, and the norms.

    `first[operator, k]` is the index of the first of TAPS points that row k reads and
    `weight[operator, k, :]` what they are multiplied with; points outside the mesh read zeros.
    `node_norm`, `half_norm` (n,): quadrature weights; the half point n - 1 lies outside a closed far
    edge and has norm 0 there.
    """

    first: np.ndarray
    weight: np.ndarray
    node_norm: np.ndarray
    half_norm: np.ndarray
    closed: np.ndarray


def line(n: int, near: str, far: str) -> Line:
    """Build the operators along an axis whose ends are "free", "sloped", "rigid" or "absorb"."""
    first = np.empty((len(OPERATORS), n), dtype=np.int64)
    weight = np.zeros((len(OPERATORS), n, TAPS))
    c1, c2, c3 = INTERIOR
    for operator in OPERATORS:
        half = operator in (HALF_STRAIN, HALF_MOMENTUM)
        first[operator] = np.arange(n) - (2 if half else 3)
        weight[operator, :, :6] = (-c3, -c2, -c1, c1, c2, c3)
    norms, closed = (np.ones(n), np.ones(n)), np.zeros(n, dtype=bool)
    if near != "absorb":
        for operator, table in zip(OPERATORS, edge_operators(near), strict=True):
            first[operator, : len(table)] = 0
            weight[operator, : len(table)] = table
        norms[0][:CLOSED_NODES], norms[1][:CLOSED_HALVES] = closure().node_norm, closure().half_norm
        closed[:CLOSED_NODES] = True
    if far != "absorb":
        _close_far(first, weight, norms, edge_operators(far))
        closed[-CLOSED_NODES:] = True
    return Line(first, weight, *norms, closed)


def _close_far(first, weight, norms, tables) -> None:
    """Mirror the closure onto the far end: node n-1-k is k's image, half point n-2-k is k's."""
    n = len(norms[0])
    for operator, table in zip(OPERATORS, tables, strict=True):
        half = operator in (HALF_STRAIN, HALF_MOMENTUM)
        rows = n - 1 - half - np.arange(len(table))
        first[operator, rows] = n - TAPS - (not half)
        weight[operator, rows] = -table[:, ::-1]
        if half:
            weight[operator, n - 1] = 0.0
    norms[0][n - 1 - np.arange(CLOSED_NODES)] = closure().node_norm
    norms[1][n - 2 - np.arange(CLOSED_HALVES)] = closure().half_norm
    norms[1][n - 1] = 0.0
