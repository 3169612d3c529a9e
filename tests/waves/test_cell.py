"""The drawing of the staggered cell in `cell.py`, asserted: what is differentiated, and where it lands."""

from functools import partial

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from groundroll.waves import pulses
from groundroll.waves.cell import MARGIN_COLUMNS, MARGIN_ROWS
from groundroll.waves.mesh import even_mesh
from groundroll.waves.simulation import PointSource

from .drive import FREE_TOP, FULL_SPACE, all_steps, interior, uniform, unlayered

H, VP, VS, DENSITY = 2.0, 400.0, 200.0, 1800.0
CORE = (slice(8, -8), slice(8, -8))
# The interior stencil is exact to degree 6; what is left is rounding of values of order 1.
ROUNDING = 1e-12


def _still():
    mesh = unlayered(even_mesh(H, 60.0, 50.0, FULL_SPACE, 0))
    return all_steps(mesh, uniform(VP, VS, DENSITY), VP, [], [], 1)


def _axes(mesh):
    """x and z of (vx, vz, normal stress, sxz) as the drawing has them, scaled to -1..1."""
    node_x, node_z = mesh.x0 + H * np.arange(mesh.nx), H * np.arange(mesh.nz)[:, None]
    half_x, half_z = node_x + H / 2, node_z + H / 2
    return (half_x, node_z), (node_x, half_z), (node_x, node_z), (half_x, half_z)


def _cubic(x, z):
    return 1e-4 * (x - 30.0) ** 3 - 2e-3 * (x - 20.0) * (z - 10.0) + 3e-5 * (x - 7.0) * z**2


def _cubic_x(x, z):
    return 3e-4 * (x - 30.0) ** 2 - 2e-3 * (z - 10.0) + 3e-5 * z**2 + 0.0 * x


def _cubic_z(x, z):
    return -2e-3 * (x - 20.0) + 6e-5 * (x - 7.0) * z


def test_strain_lands_where_the_stress_is_drawn():
    run = _still()
    vx, vz, sxx, szz, sxz = interior(run)
    at_vx, at_vz, node, shear = _axes(run.mesh)
    vx[:], vz[:] = _cubic(*at_vx), 2.0 * _cubic(*at_vz)
    run.advance(1)
    dt, mu = run.clock.dt, DENSITY * VS**2
    stiff = DENSITY * VP**2
    exx, ezz = _cubic_x(*node), 2.0 * _cubic_z(*node)
    xz = _cubic_z(*shear) + 2.0 * _cubic_x(*shear)
    for found, expected in (
        (sxx, stiff * exx + (stiff - 2 * mu) * ezz),
        (szz, stiff * ezz + (stiff - 2 * mu) * exx),
        (sxz, mu * xz),
    ):
        assert_allclose(found[CORE] / (dt * stiff), expected[CORE] / stiff, rtol=0, atol=ROUNDING)


def test_force_lands_where_the_velocity_is_drawn():
    run = _still()
    vx, vz, sxx, szz, sxz = interior(run)
    at_vx, at_vz, node, shear = _axes(run.mesh)
    sxx[:], szz[:], sxz[:] = _cubic(*node), 3.0 * _cubic(*node), 2.0 * _cubic(*shear)
    run.advance(1)
    share = run.clock.dt / DENSITY
    assert_allclose(vx[CORE] / share, (_cubic_x(*at_vx) + 2.0 * _cubic_z(*at_vx))[CORE], rtol=0, atol=ROUNDING)
    assert_allclose(vz[CORE] / share, (2.0 * _cubic_x(*at_vz) + 3.0 * _cubic_z(*at_vz))[CORE], rtol=0, atol=ROUNDING)


@pytest.mark.parametrize("wrong", ["half column", "half row"])
def test_half_a_cell_matters(wrong):
    """The mutation of both tests above: sampled half a cell off, the derivative is not found."""
    run = _still()
    vx, _, sxx, *_ = interior(run)
    (x, z), _, node, _ = _axes(run.mesh)
    vx[:] = _cubic(x - (H / 2) * (wrong == "half column"), z + (H / 2) * (wrong == "half row"))
    run.advance(1)
    found = sxx / (run.clock.dt * DENSITY * VP**2)
    assert np.abs(found[CORE] - _cubic_x(*node)[CORE]).max() > 1e-4


def test_a_plane_wave_moves_right_and_down():
    """A P wave along (0.6, 0.8): both components of velocity stay along it, and it moves by vp dt a step."""
    run = _still()
    mesh, dt = run.mesh, run.clock.dt
    direction, wavelength = (0.6, 0.8), 30.0

    def bell(x, z, time):
        return np.exp(-(((direction[0] * (x - 25.0) + direction[1] * (z - 20.0) - VP * time) / (0.3 * wavelength)) ** 2))

    at_vx, at_vz, node, shear = _axes(mesh)
    fields = interior(run)
    impedance, coupling = DENSITY * VP, DENSITY * VP * (1.0 - 2.0 * (VS / VP) ** 2)
    (nx, nz), twice = direction, 2.0 * DENSITY * VS**2 / VP
    # Velocity half a step before the stress, at n - 1/2.
    fields[0][:], fields[1][:] = nx * bell(*at_vx, -0.5 * dt), nz * bell(*at_vz, -0.5 * dt)
    fields[2][:] = -(impedance * nx**2 + coupling * nz**2) * bell(*node, 0.0)
    fields[3][:] = -(impedance * nz**2 + coupling * nx**2) * bell(*node, 0.0)
    fields[4][:] = -twice * nx * nz * bell(*shear, 0.0)
    run.advance(1)
    # One step of a smooth wave: (omega dt)^3/24 of its peak is 2e-4; half a step of error would be 0.08.
    for found, expected in ((fields[0], nx * bell(*at_vx, 0.5 * dt)), (fields[1], nz * bell(*at_vz, 0.5 * dt))):
        assert_allclose(found[CORE], expected[CORE], rtol=0, atol=1e-3)


def test_memory_is_row_after_row():
    run = _still()
    flat, view = run.march.fields.vx, interior(run)[0]
    view[3, 5] = 7.0
    assert view.shape == (run.mesh.nz, run.mesh.nx)
    assert_array_equal(np.flatnonzero(flat), [(3 + MARGIN_ROWS) * run.mesh.pitch + MARGIN_COLUMNS + 5])


def test_z_points_down():
    """A push down on the surface moves the ground below it down: velocity_z > 0, most at the surface."""
    mesh = even_mesh(1.0, 40.0, 30.0, FREE_TOP, 10)
    source = PointSource(20.0, 0.0, partial(pulses.gaussian, frequency=40.0, delay=0.04), force=(0.0, 1e5))
    run = all_steps(mesh, uniform(VP), VP, [source], [(20.0, 0.0), (20.0, 10.0)], 60)
    run.advance(60)
    furthest = np.cumsum(run.traces[:, :, 1], axis=0)
    assert mesh.depth_node[5] > mesh.depth_node[4] >= 0.0
    assert furthest[:, 0].max() > 2.0 * furthest[:, 1].max() > 0.0
    assert furthest.min() > -0.3 * furthest.max()
