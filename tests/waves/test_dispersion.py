"""The two transforms that remove time dispersion, each against leapfrog systems solved in closed form."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.waves import dispersion

DT, DELAY, FREQUENCY = 0.01, 0.4, 6.0


def _bell(t):
    return np.exp(-((np.pi * FREQUENCY * (t - DELAY)) ** 2))


def _bell_spectrum(omega):
    """integral bell exp(-i omega t) dt, closed form."""
    return np.exp(-((omega / (2 * np.pi * FREQUENCY)) ** 2) - 1j * omega * DELAY) / (np.sqrt(np.pi) * FREQUENCY)


def _leapfrog(stiffness, drive, series):
    """u of q'' + w0² q = drive s by leapfrog, any number of oscillators: (velocity sum with drive, displacement)."""
    v, u = np.zeros(len(stiffness)), np.zeros(len(stiffness))
    speed, place = np.empty((len(series), len(v))), np.empty((len(series), len(v)))
    for n, value in enumerate(series):
        v += DT * (drive * value - stiffness * u)
        u += DT * v
        speed[n], place[n] = v, u
    return speed, place


@pytest.mark.parametrize("w0", [12.0, 40.0])
def test_predistorted_force_rings_an_oscillator(w0):
    """Leapfrog with a predistorted force rings at ws = (2/dt) asin(w0 dt/2) with |S(w0)|/(w0 cos(ws dt/2)).

    The pole of 1/(w0² - W²), W = (2/dt) sin(w dt/2), has residue over dW/dw = cos(w dt/2): the amplitude and the
    phase are those of the true spectrum at w0. Rounding over 400 steps.
    """
    t = DT * np.arange(400)
    series = dispersion.predistort(_bell(t), t, DT, len(t))
    _, place = _leapfrog(np.array([w0**2]), np.ones(1), series)
    ws = dispersion.scheme_frequency(w0, DT)
    spectrum = _bell_spectrum(w0)
    rings = t[1:] > 1.2
    expected = np.imag(spectrum * np.exp(1j * ws * t[1:])) / (w0 * np.cos(0.5 * ws * DT))
    scale = abs(spectrum) / w0
    # place[n] is u at step n + 1
    assert_allclose(place[:-1, 0][rings] / scale, expected[rings] / scale, rtol=0, atol=1e-6)


@pytest.mark.parametrize("w0", [40.0])
def test_plain_force_rings_it_wrongly(w0):
    """Mutation: the pulse as it is gives the spectrum at ws, 1.5 % off at w0 dt = 0.4."""
    t = DT * np.arange(400)
    _, place = _leapfrog(np.array([w0**2]), np.ones(1), _bell(t))
    ws = dispersion.scheme_frequency(w0, DT)
    amplitude = np.abs(place[250:, 0]).max() * w0 * np.cos(0.5 * ws * DT) / abs(_bell_spectrum(w0))
    assert amplitude < 0.99
    assert_allclose(amplitude, abs(_bell_spectrum(ws) / _bell_spectrum(w0)), rtol=0.005, atol=0)


def _dispersed(times):
    """(1/pi) Re int S(W(w)) exp(i w t) dw: what a scheme makes of the bell, by a plain sum of its closed spectrum."""
    omega = np.linspace(0.0, np.pi / DT, 20001)
    spectrum = _bell_spectrum(2.0 / DT * np.sin(0.5 * omega * DT))
    spectrum[[0, -1]] *= 0.5
    step = omega[1] - omega[0]
    return np.array([(spectrum * np.exp(1j * omega * t)).real.sum() for t in times]) * step / np.pi


def test_predistort_lays_the_spectrum_where_the_scheme_looks():
    t = DT * np.arange(300)
    assert_allclose(dispersion.predistort(_bell(t), t, DT, 300), _dispersed(t), rtol=0, atol=1e-9)


@pytest.mark.parametrize("start", [0.0, 0.5 * DT])
def test_correct_undoes_a_dispersed_record(start):
    """The analytically dispersed bell comes back as the bell, at any times; its spectrum is 1e-9 at the top."""
    t = start + DT * np.arange(400)
    wanted = np.linspace(0.0, 2.5, 333)
    found = dispersion.correct(_dispersed(t)[None], DT, wanted, 30.0, start)
    assert_allclose(found[0], _bell(wanted), rtol=0, atol=1e-7)
    slope = dispersion.correct(_dispersed(t)[None], DT, wanted, 30.0, start, "acceleration")[0]
    exact = -2 * (np.pi * FREQUENCY) ** 2 * (wanted - DELAY) * _bell(wanted)
    assert_allclose(slope, exact, rtol=0, atol=1e-6 * np.abs(exact).max())
    area = dispersion.correct(_dispersed(t)[None], DT, wanted, 30.0, start, "displacement")[0]
    whole = np.array([np.trapezoid(_bell(s), s) for s in (np.linspace(0.0, w, 4001) for w in wanted)])
    assert_allclose(area, whole, rtol=0, atol=1e-6 * whole.max())


def test_both_together_return_the_input():
    t = DT * np.arange(400)
    series = dispersion.predistort(_bell(t), t, DT, 400)
    assert np.abs(series - _bell(t)).max() > 0.01
    assert_allclose(dispersion.correct(series[None], DT, t, 30.0)[0], _bell(t), rtol=0, atol=1e-7)


@pytest.mark.parametrize("mended", ["both", "source only", "record only", "neither"])
def test_a_string_carries_the_pulse(mended):
    """d'Alembert: a force s(t) at x0 on a string gives velocity s(t - r/c)/(2c); here 9 wavelengths on.

    200 standing waves, exact in space, stepped by leapfrog: all that is left is time dispersion. Before the first
    echo of the ends the misfit is that of the transforms; mended in part or not at all it is tens of per cent.
    """
    speed, length, x0, x1 = 100.0, 1000.0, 350.0, 500.0
    k = np.pi * np.arange(1, 600) / length
    k = k[k * speed * DT < 1.9]
    at0, at1 = (np.sqrt(2.0 / length) * np.sin(k * x) for x in (x0, x1))
    t = DT * np.arange(300)
    series = _bell(t) if mended in ("neither", "record only") else dispersion.predistort(_bell(t), t, DT, 300)
    velocity, _ = _leapfrog((k * speed) ** 2, at0, series)
    record = (velocity @ at1)[None]
    wanted = np.arange(0.0, 2.9, 0.007)
    if mended in ("both", "record only"):
        found = dispersion.correct(record, DT, wanted, 25.0, 0.5 * DT)[0]
    else:
        found = np.interp(wanted, t + 0.5 * DT, record[0])
    exact = _bell(wanted - (x1 - x0) / speed) / (2.0 * speed)
    error = np.linalg.norm(found - exact) / np.linalg.norm(exact)
    if mended == "both":
        assert error < 1e-5
    else:
        assert error > 0.02
