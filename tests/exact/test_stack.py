"""The stack's response at single frequencies and wavenumbers, against modes, columns, Zoeppritz, power, matrices."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.linalg import expm

from groundroll.exact import column, layered, modes, planewave
from groundroll.exact.media import Layer, complex_moduli, half_space
from groundroll.exact.source import LineSource
from groundroll.exact.stack import Stack
from groundroll.exact.wavebasis import Waves

TWO = [Layer(10, 400, 200, 1800), half_space(800, 400, 2000)]


def kernel(layers, omega, k, source):
    """Surface displacement (2, wavenumber) per wavenumber, straight from the stack."""
    depth = source.depth
    heights, owners, level, _ = layered._parts(layers, depth, [0.0])
    moduli = [complex_moduli(layer, np.array([omega])) for layer in layers]
    waves = [Waves(p[0], s[0], layer.density, omega, k) for layer, (p, s) in zip(layers, moduli)]
    stack = Stack([waves[o] for o in owners], heights)
    return stack.motion(level, *layered._jumps(source, waves[owners[level]]), {0})[0].sum(1)


@pytest.mark.parametrize("frequency, mode", [(8.0, 0), (8.0, 1), (20.0, 0), (20.0, 1), (40.0, 1)])
def test_resonates_at_the_modes(frequency, mode):
    """With hardly any damping of the frequency the response peaks at the modes found by minors (Dunkin 1965)."""
    omega = 2 * np.pi * frequency
    k_mode = omega / modes.modal_speed(TWO, [frequency], mode)[0]
    k = k_mode * (1 + np.linspace(-1e-4, 1e-4, 2001))
    response = np.abs(kernel(TWO, omega * (1 - 1e-6j), k, LineSource(0, 0, force=(0, 1)))[1])
    assert abs(k[response.argmax()] / k_mode - 1) < 3e-7
    assert response.max() > 20 * response[0]


def test_vertical_waves_are_the_column():
    """At k = 0, a deep force reaches the surface as the column's transfer function says (Haskell 1953), P and S."""
    k, omega = np.array([1e-9]), 2 * np.pi * 7.0 * (1 - 1e-9j)
    bare = [TWO[-1]]
    for component, wave in enumerate("SP"):
        force = tuple(np.eye(2)[component])
        # Depth is 10 m less in the bare half-space: the rock above the source is as thick.
        soil = kernel(TWO, omega, k, LineSource(0, 50.0, force=force))
        rock = kernel(bare, omega, k, LineSource(0, 40.0, force=force))
        ratio = soil[component] / rock[component]
        assert_allclose(ratio, column.surface_over_outcrop(TWO, [7.0], wave), rtol=1e-6, atol=0)


def test_interface_reflects_as_zoeppritz():
    """Reflection matrix of the stack against Zoeppritz's coefficients, at 20 degrees and past the critical angle."""
    for angle in (20.0, 60.0):
        omega = 2 * np.pi * 10 * (1 - 1e-13j)
        k = np.array([omega.real * np.sin(np.radians(angle)) / 400])
        waves = [Waves(m.density * m.vp**2, m.density * m.vs**2, m.density, omega, k) for m in TWO]
        reflections, _ = Stack(waves, [10.0, np.inf]).from_below(0)
        r_pp, r_ps = reflections[0][:, 0, 0]
        expected = planewave.interface(TWO[0], TWO[1], angle, "P")
        # Potentials to displacement: P amplitude omega/alpha, S amplitude omega/beta, turned by -90 degrees.
        assert_allclose(r_pp, expected[0], rtol=0, atol=1e-9)
        assert_allclose(np.abs(r_ps) * 400 / 200, np.abs(expected[1]), rtol=0, atol=1e-9)


@pytest.mark.parametrize("poisson", [0.25, 0.4])
@pytest.mark.parametrize("component", [0, 1])
def test_power_of_a_surface_force(poisson, component):
    """W = omega F² (1 - nu)/(4 mu), vertical or horizontal: half the force times the velocity beneath it.

    u(0) = (1/pi) int u(k) dk over k > 0; only its imaginary part, which converges, is power. The damped frequency
    makes an error of its own order, 1e-4.
    """
    v = np.sqrt((2 - 2 * poisson) / (1 - 2 * poisson))
    omega, step = 2 * np.pi * 10 * (1 - 1e-4j), 2e-5
    k = omega.real / 200 * step * (0.5 + np.arange(int(4 / step)))
    source = LineSource(0, 0, force=tuple(np.eye(2)[component]))
    field = kernel([half_space(200 * v, 200, 1800)], omega, k, source)[component]
    power = 0.5 * (1j * omega * field.sum() * (k[1] - k[0]) / np.pi).real
    assert_allclose(power, omega.real * (1 - poisson) / (4 * 1800 * 200**2), rtol=1e-3, atol=0)


def system_matrix(layer, omega, k):
    """A of dy/dz = A y, y = (ux, uz, sigma_xz, sigma_zz), from Hooke's law and Newton's (Aki & Richards, ch. 7)."""
    p, s = (m[0] for m in complex_moduli(layer, np.array([omega])))
    lame, inertia = p - 2 * s, layer.density * omega**2
    return np.array([
        [0, 1j * k, 1 / s, 0],
        [1j * k * lame / p, 0, 0, 1 / p],
        [k**2 * (p - lame**2 / p) - inertia, 0, 0, 1j * k * lame / p],
        [0, -inertia, 1j * k, 0],
    ])


@pytest.mark.parametrize("k", [0.01, 0.12, 0.31, 0.8])
@pytest.mark.parametrize("source", [LineSource(0, 4.0, force=(1, 0.3)), LineSource(0, 4.0, moment=(3, -1, 2)),
                                    LineSource(0, 0.0, force=(1, 0.3))])
def test_matrix_exponentials_agree(source, k):
    """Layers carried by expm(A h) alone, no wave basis, the half-space by the decaying eigenvectors of A."""
    layers = [Layer(3, 400, 150, 1700, 40, 20), Layer(5, 900, 220, 1900, 80, 30), half_space(1500, 600, 2100)]
    omega = 2 * np.pi * 15 * (1 - 0.01j)
    a = [system_matrix(layer, omega, k) for layer in layers]
    mxx, mzz, mxz = source.moment
    jump = -np.array([0, 0, *source.force]) - np.array([0, 0, 1j * k * mxx, 1j * k * mxz])
    jump = jump + a[1] @ np.array([0, 0, mxz, mzz])
    if source.depth:
        above, below = expm(a[1] * 1.0) @ expm(a[0] * 3.0), expm(a[1] * 4.0)
    else:
        above, below = np.eye(4), expm(a[1] * 5.0) @ expm(a[0] * 3.0)
    rates, vectors = np.linalg.eig(a[2])
    sinking = vectors[:, rates.real < 0]
    # below (above (u, 0) + jump) = sinking c
    unknowns = np.linalg.solve(np.column_stack([(below @ above)[:, :2], -sinking]), -below @ jump)
    found = kernel(layers, omega, np.array([k]), source)[:, 0]
    assert_allclose(found, unknowns[:2], rtol=0, atol=1e-9 * np.abs(unknowns[:2]).max())
