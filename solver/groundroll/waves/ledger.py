"""Totals over the section: momentum and energy, from the fields at the end of a step.

    momentum_x = sum H rho vx h^2  (N s/m; H: quadrature weights times the stretch J), likewise z
    energy     = 1/2 sum H rho (vx^2 + vz^2) h^2 + 1/2 <s(n), S s(n+1)>
               = kinetic + 1/2 <s(n+1), S s(n+1)> - dt/2 <strain rate(n + 1/2), s(n+1)>      (J/m)

S is the compliance. This energy is constant to rounding in a closed box without sources; the plain sum of
kinetic and strain energy at one time would waver. Absorbing cells are left out; with attenuation the energy
is that of the springs without the memory variables.
"""

import time
from typing import NamedTuple

import numpy as np

from groundroll.waves.cell import SCRATCH_ROWS
from groundroll.waves.general_kernels import strain_rates
from groundroll.waves.jit import entry, kernel
from groundroll.waves.terrain_kernels import stretch

# The section is summed in as many parts, whatever the number of threads, so that all give the same bits.
PARTS = 8


@kernel
def compliance_energy(xx, zz, c11, c13, c33):
    """Return s : S : s of the normal stresses at one node; where c33 (c11) is 0 that stress is held at 0."""
    determinant = c11 * c33 - c13 * c13
    if c11 > 0.0 and c33 > 0.0 and determinant > 0.0:
        return (c33 * xx * xx - 2.0 * c13 * xx * zz + c11 * zz * zz) / determinant
    if c11 > 0.0:
        return xx * xx / c11
    if c33 > 0.0:
        return zz * zz / c33
    return 0.0


@entry
def totals(first, last, a, b, weights, dt_over_h, ground, f, scratch, out):
    """Sum rows first..last-1, columns a..b-1 into out = [momentum x, momentum z, kinetic, strain energy].

    Result per h^2; the material arrays hold dt/(rho h), under terrain dt/(rho J h), and stiffness dt/h,
    hence the factors of dt/h (`dt_over_h`).
    """
    node_x, half_x = weights.node_column, weights.half_column
    m, margin = ground.material, ground.frame.margin
    mapped = ground.terrain.rows > 0
    ex, ez, g = scratch[0], scratch[1], scratch[2]
    for k in range(first, last):
        base = ground.frame.origin + k * ground.frame.pitch
        strain_rates(k, a, b, ground, f, scratch)
        for i in range(a, b):
            at = base + i
            if m.bx[at] > 0.0:
                w = half_x[i] * weights.node_row[k] * dt_over_h / np.float64(m.bx[at])
                out[0] += w * f.vx[at]
                out[2] += 0.5 * w * np.float64(f.vx[at]) ** 2
            if m.bz[at] > 0.0:
                w = node_x[i] * weights.half_row[k] * dt_over_h / np.float64(m.bz[at])
                out[1] += w * f.vz[at]
                out[2] += 0.5 * w * np.float64(f.vz[at]) ** 2
            xx, zz, xz = np.float64(f.sxx[at]), np.float64(f.szz[at]), np.float64(f.sxz[at])
            c11, c13, c33, mu = np.float64(m.c11[at]), np.float64(m.c13[at]), np.float64(m.c33[at]), np.float64(m.mu[at])
            w = node_x[i] * weights.node_row[k] * (stretch(ground.terrain, k, i + margin, 0, 0) if mapped else 1.0)
            # A stress held at zero on a free edge stores nothing, even where a source has prescribed it.
            work = (xx * ex[i] if c11 > 0.0 else 0.0) + (zz * ez[i] if c33 > 0.0 else 0.0)
            out[3] += 0.5 * w * dt_over_h * (compliance_energy(xx, zz, c11, c13, c33) - work)
            if mu > 0.0:
                w = half_x[i] * weights.half_row[k] * (stretch(ground.terrain, k, i + margin, 1, 1) if mapped else 1.0)
                out[3] += 0.5 * w * dt_over_h * (xz * xz / mu - xz * g[i])


class Weights(NamedTuple):
    """Quadrature weights H along x and z; on a level mesh those along z hold J, under terrain J varies along x
    and is put in by the kernel, except in the masses, which hold it already."""

    node_column: np.ndarray
    half_column: np.ndarray
    node_row: np.ndarray
    half_row: np.ndarray


def quadrature(mesh) -> Weights:
    node, half = mesh.rows.node_norm, mesh.rows.half_norm
    if mesh.terrain is None:
        node, half = node * mesh.stretch_node, half * mesh.stretch_half
    return Weights(mesh.columns.node_norm, mesh.columns.half_norm, node, half)


class Ledger:
    """Keeps the totals of a march: `time` (s) and `values` rows of (momentum x, z, kinetic, strain energy)."""

    def __init__(self, mesh, march, dt: float):
        self._mesh, self._march, self._dt = mesh, march, dt
        self._weights = quadrature(mesh)
        self._scratch = np.zeros((PARTS, SCRATCH_ROWS, mesh.pitch), dtype=march.fields.vx.dtype)
        self.steps: list[int] = []
        self.values: list[np.ndarray] = []

    def warm_up(self) -> float:
        """Compile the kernel, or load it from the cache; return the seconds it took."""
        start = time.perf_counter()
        self._totals((0, 0), (0, 0))
        return time.perf_counter() - start

    def note(self) -> np.ndarray:
        """Add and return the totals at the march's present step."""
        mesh = self._mesh
        left, right, top, bottom = mesh.absorbing
        # The half column and half row beyond an absorbing bound lie in its layer, and so does their node's work.
        columns = (left, mesh.nx - right - (1 if right else 0))
        rows = (top, mesh.nz - bottom - (1 if bottom else 0))
        out = self._totals(rows, columns)
        self.steps.append(self._march.step)
        self.values.append(out)
        return out

    def _totals(self, rows, columns) -> np.ndarray:
        """Return the totals over rows first..end-1 and columns first..end-1."""
        cuts = np.linspace(*rows, PARTS + 1).astype(np.uint64)
        span, out = [np.uint64(v) for v in columns], np.zeros((PARTS, 4))
        march, h = self._march, self._mesh.spacing

        def add(part):
            data = self._weights, self._dt / h, march.ground, march.fields, self._scratch[part], out[part]
            totals(cuts[part], cuts[part + 1], *span, *data)

        march.side_by_side(add, PARTS)
        return out.sum(axis=0) * h**2
