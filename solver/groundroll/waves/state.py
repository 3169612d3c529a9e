"""What the kernels work on: flat arrays grouped by meaning, all of one precision.

Every group is a NamedTuple so that compiled code sees plain arrays under readable names.
"""

from typing import NamedTuple

import numpy as np

from groundroll.waves.cell import ALIGNED, MARGIN_COLUMNS, MARGIN_ROWS


class Fields(NamedTuple):
    """Velocity (m/s) and stress (Pa) on the cell of `cell.py`, flat with margins."""

    vx: np.ndarray
    vz: np.ndarray
    sxx: np.ndarray
    szz: np.ndarray
    sxz: np.ndarray


class Material(NamedTuple):
    """Properties times dt/h, flat with margins: bx, bz = dt/(rho h); c = stiffness dt/h.

    sxx' = c11 exx + c13 ezz, szz' = c13 exx + c33 ezz, sxz' = mu 2exz. `even[band]` is 1 where
    c33 = c11 on both rows of a band: the kernels then read c11 for both and spare the memory.
    """

    bx: np.ndarray
    bz: np.ndarray
    c11: np.ndarray
    c13: np.ndarray
    c33: np.ndarray
    mu: np.ndarray
    even: np.ndarray


class Rows(NamedTuple):
    """Derivatives along z of `count` rows: `weight` (4, nz, TAPS) of `operators.Line` over the stretch,
    `first` (4, nz) the flat entry of column 0 of the first row read; `node` and `half` (nz, 3):
    interior coefficients over the stretch; `plain[band]`: 1 where the fast kernels serve."""

    count: int
    first: np.ndarray
    weight: np.ndarray
    node: np.ndarray
    half: np.ndarray
    plain: np.ndarray
    lag: int


class Columns(NamedTuple):
    """Derivatives along x: interior coefficients `c` (3,); columns below `left` and from `right` on
    are served by the general kernels. Columns below `closed_left` and from `closed_right` on lie at a
    closed edge and take the operators `first`, `weight` of `operators.Line`."""

    c: np.ndarray
    left: int
    right: int
    closed_left: int
    closed_right: int
    first: np.ndarray
    weight: np.ndarray


class Frame(NamedTuple):
    """Sizes: padded row length, index of cell [0, 0], columns of margin, stages of a time step."""

    pitch: int
    origin: int
    margin: int
    phases: int


class Sides(NamedTuple):
    """Absorbing columns: window entry w is column w below `left`, then column `right` + w - `left`.

    `psi` (4, nz, w): convolution variables of the four x derivatives; `b`, `a`, `fade` (2, w): recursion
    and fading at node and half columns, see `absorbing.py`."""

    left: int
    right: int
    psi: np.ndarray
    b: np.ndarray
    a: np.ndarray
    fade: np.ndarray


class Layers(NamedTuple):
    """Absorbing rows: `index[k]` is the entry r of row k in `psi` (4, r, pitch), or -1; `b`, `a`,
    `fade` (2, r) as in `Sides`."""

    index: np.ndarray
    psi: np.ndarray
    b: np.ndarray
    a: np.ndarray
    fade: np.ndarray


class Terrain(NamedTuple):
    """The terrain-following mapping, see `terrain_kernels.py`; `rows` = 0 on level ground.

    The first `rows` rows are mapped; helpers stand on `helper_rows`. Column vectors (2, pitch) at node and
    half columns, padded: `slope` = d shift/dx, `shift` (m). Row vectors (2, nz) at node and half rows:
    `blend`, `bend`, `rise`. Interpolation along z (2, nz, 10), from nodes and from halves: `plain`, and
    `blended` = times the blend of the rows read; `first` their first flat entry. `operator` (4, nz, TAPS):
    the derivatives not divided by J, `operator_first` as in `Rows`. `across` (TAPS): interpolation along x.
    """

    rows: int
    helper_rows: int
    slope: np.ndarray
    shift: np.ndarray
    blend: np.ndarray
    bend: np.ndarray
    rise: np.ndarray
    first: np.ndarray
    plain: np.ndarray
    blended: np.ndarray
    operator_first: np.ndarray
    operator: np.ndarray
    across: np.ndarray
    tx: np.ndarray
    tz: np.ndarray
    gx: np.ndarray
    gz: np.ndarray


class Memory(NamedTuple):
    """Attenuation, see `memory_kernels.py`; `count` mechanisms, 0 where nothing damps.

    `decay` (count,): E_l; `y`, `z` (count + 1,): weights of both shapes for the old x_l and, last, for the strain
    rate; `xi`: 3 count flat arrays, x_l of exx, then of ezz, then of 2exz; `p1`, `p2` and `w1`, `w2` at nodes,
    `h1`, `h2` at sxz: coefficients of both shapes for P, half of P less S, and S, flat."""

    count: int
    decay: np.ndarray
    y: np.ndarray
    z: np.ndarray
    xi: tuple[np.ndarray, ...]
    p1: np.ndarray
    p2: np.ndarray
    w1: np.ndarray
    w2: np.ndarray
    h1: np.ndarray
    h2: np.ndarray


class Ground(NamedTuple):
    """All that stays while time runs, except convolution and memory variables and the terrain's helpers."""

    frame: Frame
    material: Material
    rows: Rows
    columns: Columns
    sides: Sides
    layers: Layers
    terrain: Terrain
    memory: Memory


def flat_zeros(mesh, count: int, dtype) -> list[np.ndarray]:
    """Return `count` flat zero arrays with margins, in one block, each shifted by some cache lines.

    The shift keeps the same cell of different arrays in different sets of the first cache.
    """
    size = mesh.padded_rows * mesh.pitch
    step = size + 7 * 16
    block = np.zeros(count * step + 16, dtype=dtype)
    skip = (-block.ctypes.data // block.itemsize) % 16
    return [block[skip + a * step : skip + a * step + size] for a in range(count)]


def aligned_span(first: int, end: int) -> tuple[int, int]:
    """Return columns first..end-1 narrowed to whole cache lines, as they are if no line is left."""
    low, high = first + -first % ALIGNED, end - end % ALIGNED
    return (low, high) if low < high else (first, end)


def inner(flat: np.ndarray, mesh) -> np.ndarray:
    """Return the (nz, nx) view of a flat field without its margins."""
    rows = flat.reshape(mesh.padded_rows, mesh.pitch)
    return rows[MARGIN_ROWS : MARGIN_ROWS + mesh.nz, MARGIN_COLUMNS : MARGIN_COLUMNS + mesh.nx]


def frame(mesh) -> Frame:
    origin = MARGIN_ROWS * mesh.pitch + MARGIN_COLUMNS
    return Frame(np.uint64(mesh.pitch), np.uint64(origin), np.uint64(MARGIN_COLUMNS), 2 if mesh.terrain is None else 4)


def new_fields(mesh, dtype) -> Fields:
    return Fields(*flat_zeros(mesh, 5, dtype))
