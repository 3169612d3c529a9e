"""Effective properties of mesh cells whose interfaces may lie anywhere inside them.

Each cell is a column of width w about x between two edges; it is cut into sub-columns. Down each sub-column
the integrals over the pieces of ground are exact. Where the edges are not level a sub-column's edges lie on
the straight line that the neighbouring columns' edges suggest. Only ground counts: the part of a cell above
the surface is left out, and a cell that lies wholly above it takes the ground at the surface.

The part of a cell that is void is left out as well, if it is less than half; else the cell has no stiffness. The
density of a cell is never less than LEAST_FILL of its ground's: lighter cells are unstable and ring. A wholly void
cell has the density inf, so that its inverse is 0.
"""

from typing import NamedTuple

import numpy as np

from .columns import Columns
from .model import GroundModel
from .sweep import column_means

CHUNK_PIECES = 400_000
"""Pieces and sub-cells worked on together: few enough to stay near the processor."""

LEAST_FILL = 0.5
"""Part of a cell that must be ground for the cell to have stiffness; least part of the ground's mass that it keeps. At
0.25 runs beside a round cavity blew up at 24 points per wavelength."""


class Shear(NamedTuple):
    """Shear modulus (Pa) and its inverse quality factor, each (nz, nx)."""

    shear: np.ndarray
    inverse_qs: np.ndarray


class Stiffness(NamedTuple):
    """Plane-strain stiffness c11, c13, c33 (Pa) and inverse quality factors of P modulus and shear, each (nz, nx)."""

    c11: np.ndarray
    c13: np.ndarray
    c33: np.ndarray
    inverse_qp: np.ndarray
    inverse_qs: np.ndarray


def effective(
    model: GroundModel, x: np.ndarray, width: float, z_edges: np.ndarray, kind: str, samples: int = 4
) -> np.ndarray | Shear | Stiffness:
    """Properties averaged over cells.

    `x` (nx,) centres and `width` of the cells (m); `z_edges` (nz+1, nx) or (nz+1, 1), z of their edges (m),
    increasing downward; `samples` sub-columns per cell. Arrays are (nz, nx), or (nz, 1) where the ground is
    laterally uniform and z_edges has one column.

    kind "density": arithmetic mean (kg/m3). kind "shear": `Shear` with mu = 1/<1/mu>,
    1/Qs = <1/(mu Qs)>/<1/mu>. kind "stiffness": `Stiffness` with, down each sub-column, M = rho vp^2,
    lambda = M - 2 rho vs^2,

        c33 = 1/<1/M>,  c13 = <lambda/M> c33,  c11 = <M - lambda^2/M> + <lambda/M>^2 c33     (Backus 1962, eq. 13)

    and then across the sub-columns the same with 1 and 3 exchanged,

        c11 = 1/<1/c11>,  c13 = <c13/c11> c11,  c33 = <c33 - c13^2/c11> + <c13/c11>^2 c11;

    1/Qp = <1/(M Qp)>/<1/M>, 1/Qs as above (Moczo, Kristek, Vavrycuk, Archuleta & Halada 2002; Kristek, Moczo,
    Chaljub & Kristekova 2017). In cells of one material c11 and c33 are the same bits.
    """
    if model.laterally_uniform:
        samples = 1
        if z_edges.shape[1] == 1:
            x = x[:1]
    average = {"density": _density, "shear": _shear, "stiffness": _stiffness}[kind]
    places = _SubColumns(model, x, width, z_edges, samples)
    parts = [average(places, begin, end) for begin, end in places.chunks()]
    joined = [np.concatenate(arrays, axis=1) for arrays in zip(*parts, strict=True)]
    return {"density": lambda density: density, "shear": Shear, "stiffness": Stiffness}[kind](*joined)


class _SubColumns:
    """The sub-columns of all cells, taken a few columns at a time."""

    def __init__(self, model: GroundModel, x: np.ndarray, width: float, z_edges: np.ndarray, samples: int):
        self.model, self.x, self.samples = model, x, samples
        self.offset = width * ((np.arange(samples) + 0.5) / samples - 0.5)
        self.level = z_edges.shape[1] == 1
        self.edges = z_edges
        self.rise = np.zeros_like(z_edges) if self.level or len(x) < 2 else np.gradient(z_edges, x, axis=1)

    def chunks(self):
        """Begin and end of the cell columns taken together."""
        pieces = self.model.columns(self.x[:1]).top.shape[1]
        size = max(1, CHUNK_PIECES // (self.samples * max(pieces, len(self.edges))))
        for begin in range(0, len(self.x), size):
            yield begin, min(begin + size, len(self.x))

    def take(self, begin: int, end: int) -> tuple[Columns, np.ndarray]:
        """Profiles and edges (columns x samples, nz+1) of some cell columns, sub-columns of a cell in turn."""
        x = (self.x[begin:end, None] + self.offset).ravel()
        if self.level:
            edges = np.broadcast_to(self.edges.T, (len(x), len(self.edges)))
        else:
            centre, rise = self.edges.T[begin:end, None], self.rise.T[begin:end, None]
            edges = (centre + rise * self.offset[:, None]).reshape(len(x), -1)
        return self.model.columns(x), edges

    def means(self, columns: Columns, edges: np.ndarray, *fields: np.ndarray):
        """Vertical means of fields (m, n): (f, cells, samples, nz), and the first and last piece met, each (cells, samples, nz)."""
        values = np.ascontiguousarray(np.stack(fields))
        means, first, last = column_means(columns.surface, columns.top, values, edges)
        shape = (-1, self.samples, len(self.edges) - 1)
        return means.reshape(len(fields), *shape), first.reshape(shape), last.reshape(shape)


def _density(places: _SubColumns, begin: int, end: int) -> tuple[np.ndarray]:
    columns, edges = places.take(begin, end)
    (density, ground), _, _ = places.means(columns, edges, columns.density, _is_ground(columns))
    mean, filled = _across(density), _across(ground)
    mean = np.maximum(mean, LEAST_FILL * _ratio(mean, filled))
    return (np.where(mean > 0.0, mean, np.inf).T,)


def _is_ground(columns: Columns) -> np.ndarray:
    """1 where there is ground, 0 in a void."""
    return (columns.density > 0.0).astype(float)


def _mean(values: np.ndarray, filled: np.ndarray) -> np.ndarray:
    """Mean over the sub-columns (axis 1), each counting by how far it is ground; 0 where none is."""
    if (filled == 1.0).all():
        return values.mean(axis=1)
    return _ratio((values * filled).sum(axis=1), filled.sum(axis=1))


def _across(values: np.ndarray) -> np.ndarray:
    """Mean over the sub-columns (axis 1), the value itself where all are the same."""
    least = values.min(axis=1)
    return np.where(least == values.max(axis=1), least, values.mean(axis=1))


def _inverse(values: np.ndarray) -> np.ndarray:
    """1/values, 0 where 0: what is void is left out of means."""
    return _ratio(np.ones(np.shape(values)), values)


def _ratio(above: np.ndarray, below: np.ndarray) -> np.ndarray:
    """above/below, 0 where `below` is 0 or inf."""
    return np.divide(above, below, out=np.zeros(np.shape(above)), where=(below > 0.0) & np.isfinite(below))


def _loss(modulus: np.ndarray, quality: np.ndarray) -> np.ndarray:
    """1/(modulus quality), 0 in voids."""
    return _ratio(1.0 / quality, modulus)


def _shear(places: _SubColumns, begin: int, end: int) -> tuple[np.ndarray, np.ndarray]:
    columns, edges = places.take(begin, end)
    modulus = columns.density * columns.vs**2
    fields = (_inverse(modulus), _loss(modulus, columns.qs), _is_ground(columns))
    means, first, last = places.means(columns, edges, *fields)
    compliance, loss, filled = (_across(mean) for mean in means)
    shear = np.where(filled > LEAST_FILL, _ratio(filled, compliance), 0.0)
    (exact, quality), single = _of_one_piece(first, last, modulus, columns.qs)
    inverse_qs = np.where(single, 1.0 / quality, _ratio(loss, compliance))
    return np.where(single, exact, shear).T, inverse_qs.T


def _of_one_piece(first: np.ndarray, last: np.ndarray, *fields: np.ndarray) -> tuple[list[np.ndarray], np.ndarray]:
    """Each field in the piece of each cell's first sub-column (cells, nz), and where a cell knows one value only.

    `first`, `last` (cells, samples, nz) are the first and last piece met; fields (cells x samples, n).
    """
    single = (first == last).all(axis=1)
    values = []
    for field in fields:
        there = field.reshape(*first.shape[:2], -1)
        met = np.take_along_axis(there, first, axis=2)
        single &= (met == met[:, :1]).all(axis=1)
        values.append(met[:, 0])
    return values, single


def _stiffness(places: _SubColumns, begin: int, end: int) -> tuple[np.ndarray, ...]:
    columns, edges = places.take(begin, end)
    mu = columns.density * columns.vs**2
    p = columns.density * columns.vp**2
    lam = p - 2.0 * mu
    share = _ratio(lam, p)
    fields = (_inverse(p), share, p - lam * share, _inverse(mu), _loss(p, columns.qp), _loss(mu, columns.qs), _is_ground(columns))
    (*means, filled), first, last = places.means(columns, edges, *fields)
    compliance, share, rest = (_ratio(mean, filled) for mean in means[:3])
    c11, c13, c33 = _across_sub_columns(*_down_sub_columns(compliance, share, rest), filled)
    p_loss, s_loss = (_ratio(_across(means[loss]), _across(means[of])) for loss, of in ((4, 0), (5, 3)))
    (p, lam, qp, qs), single = _of_one_piece(first, last, p, lam, columns.qp, columns.qs)
    exact = (p, lam, p, 1.0 / qp, 1.0 / qs)
    found = (c11, c13, c33, p_loss, s_loss)
    return tuple(np.where(single, e, f).T for e, f in zip(exact, found, strict=True))


def _down_sub_columns(compliance, share, rest):
    """c11, c13, c33 of each sub-column from <1/M>, <lambda/M>, <M - lambda^2/M> of its ground; all 0 where it has none."""
    c33 = _inverse(compliance)
    c11 = np.where(c33 > 0.0, rest + share**2 * c33, 0.0)
    return c11, share * c33, c33


def _across_sub_columns(c11, c13, c33, filled):
    """c11, c13, c33 of cells (cells, nz) from those of their sub-columns in series, which are `filled` with ground so
    far; all 0 where half of the cell or more is void."""
    stiff = np.where(filled.mean(axis=1) > LEAST_FILL, _inverse(_mean(_inverse(c11), filled)), 0.0)
    share = _ratio(c13, c11)
    mean_share = _mean(share, filled)
    rest = _mean(c33 - c13 * share, filled)
    return stiff, mean_share * stiff, np.where(stiff > 0.0, rest + mean_share**2 * stiff, 0.0)
