import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.exact import fullspace
from groundroll.exact.media import half_space
from groundroll.exact.source import LineSource, explosion

CLAY = half_space(800, 400, 1800)
OMEGA = np.array([2 * np.pi * 10.0 + 0j])


def test_explosion():
    """|u_r| = M0 k/(4 rho alpha²) |H1(2)(kr)| at 10 Hz (Aki & Richards; seven digits)."""
    found = fullspace.displacement(CLAY, explosion(3, 2, 1e6), [[13, 2], [3, 102]], OMEGA)[:, :, 0]
    assert_allclose(np.abs([found[0, 0], found[1, 1]]), [1.805257e-5, 4.867096e-6], rtol=3e-7, atol=0)
    assert_allclose([found[0, 1], found[1, 0]], 0, rtol=0, atol=1e-18)


def test_moment_is_the_limit_of_force_pairs():
    """M_jk acts as forces M_jk/d at +d/2 along k and -M_jk/d at -d/2 (definition of a moment tensor)."""
    receivers, d, moment = [[7, 11], [-20, 4]], 1e-2, (2.0, -1.0, 0.7)
    mxx, mzz, mxz = moment
    expected = 0
    for direction, force in (((1, 0), (mxx, mxz)), ((0, 1), (mxz, mzz))):
        for sign in (1, -1):
            x, z = (sign * d / 2 * c for c in direction)
            part = LineSource(x, z, force=tuple(sign * f / d for f in force))
            expected = expected + fullspace.displacement(CLAY, part, receivers, OMEGA)
    found = fullspace.displacement(CLAY, LineSource(0, 0, moment=moment), receivers, OMEGA)
    assert_allclose(found, expected, rtol=0, atol=1e-6 * np.abs(expected).max())


def test_force_obeys_the_wave_equation():
    """(lambda + mu) grad div u + mu del² u + rho omega² u = 0 away from the source, by differences over 0.1 m."""
    h, n = 0.1, np.arange(-1, 2)
    x, z = np.meshgrid(9 + h * n, 5 + h * n, indexing="ij")
    source = LineSource(0, 0, force=(1.0, -0.6))
    u = fullspace.displacement(CLAY, source, np.column_stack([x.ravel(), z.ravel()]), OMEGA)[:, :, 0]
    u = u.reshape(3, 3, 2)
    xx = (u[2, 1] - 2 * u[1, 1] + u[0, 1]) / h**2
    zz = (u[1, 2] - 2 * u[1, 1] + u[1, 0]) / h**2
    xz = (u[2, 2] - u[2, 0] - u[0, 2] + u[0, 0]) / (4 * h**2)
    a2, b2 = 800.0**2, 400.0**2
    left = np.array([a2 * xx[0] + b2 * zz[0] + (a2 - b2) * xz[1], b2 * xx[1] + a2 * zz[1] + (a2 - b2) * xz[0]])
    right = -(OMEGA[0] ** 2) * u[1, 1]
    assert_allclose(left, right, rtol=0, atol=3e-4 * np.abs(a2 * xx).max())


def test_traces_of_a_late_arrival(ricker):
    """80 wavelengths off, an explosion's spectrum is the far field of H1(2), good to 3/(8kr) = 0.1 %."""
    times = np.arange(3000) * 5e-4
    x = 800.0
    ux, uz = fullspace.seismograms(CLAY, explosion(0, 0, 1.0), [[x, 0]], ricker(80, 0.02), times)
    frequency = np.fft.rfftfreq(len(times), 5e-4)
    spectrum = np.fft.rfft(ricker(80, 0.02)(times))
    omega = 2 * np.pi * frequency
    # i omega u, with u = -i (M0 k / (4 rho alpha²)) H1(2)(kr) and H1(2) = sqrt(2/(pi k r)) exp(-i (kr - 3 pi/4)).
    far = spectrum * omega**2 / (4 * 1800 * 800**3) * np.exp(-1j * (omega * x / 800 - 3 * np.pi / 4))
    far[1:] *= np.sqrt(2 * 800 / (np.pi * omega[1:] * x))
    expected = np.fft.irfft(far, len(times))
    assert_allclose(ux[0], expected, rtol=0, atol=0.01 * np.abs(expected).max())
    assert_allclose(uz, 0, rtol=0, atol=1e-12 * np.abs(ux).max())


def test_silence_before_arrival(ricker):
    times = np.arange(1000) * 1e-3
    ux, _ = fullspace.seismograms(CLAY, LineSource(0, 0, force=(1, 0)), [[400, 0]], ricker(20, 0.1), times)
    assert np.abs(ux[0, times < 0.5]).max() < 1e-6 * np.abs(ux).max()


def test_receiver_on_source():
    with pytest.raises(InputError, match="sits on the line source"):
        fullspace.displacement(CLAY, explosion(3, 2, 1.0), [[3, 2]], OMEGA)
