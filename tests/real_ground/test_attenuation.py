"""Attenuation against closed forms: amplitude and phase over 20 wavelengths, and the resonance of a damped column."""

from dataclasses import replace
from functools import cache, partial

import numpy as np
import pytest

from groundroll import Scenario, plan
from groundroll.exact import fullspace
from groundroll.exact.media import half_space, kjartansson
from groundroll.exact.source import LineSource
from groundroll.running.choices import COURANT_SHARE, stable_step
from groundroll.running.ground_on_mesh import sample
from groundroll.running.losses import LossModel
from groundroll.waves import pulses, relaxation
from groundroll.waves.assembly import EdgeDamping, Properties
from groundroll.waves.attenuation import Loss
from groundroll.waves.cell import NODE_MOMENTUM
from groundroll.waves.dispersion import scheme_frequency
from groundroll.waves.mesh import even_mesh
from groundroll.waves.operators import Line, line
from groundroll.waves.simulation import PointSource, Simulation, clock

VS, DENSITY, FREQUENCY = 200.0, 1800.0, 10.0
VP = VS * 2.0**0.5  # lambda = 0: a strip with free sides then carries plane P waves
HIGHEST = pulses.RICKER_BAND * FREQUENCY
WAVELENGTHS = 20.0
# Over FREQUENCY; the pulse's spectrum is 24 to 100 % of its peak there.
SHARES = np.array([1.0, 1.5, 2.0])
MARGIN = 5.0  # of the strip above the source and below the last receiver, wavelengths
STRIP = 14  # columns


@cache
def losses(highest=HIGHEST):
    omega = relaxation.band_frequencies(highest / 100.0, highest, 4)
    return LossModel(highest / 100.0, highest, FREQUENCY, omega)


def modulus(q, m_0, highest=HIGHEST):
    """The complex modulus of the body that the solver fits to a speed and a Q, as a function of omega."""
    model = losses(highest)
    weights = model.coefficients(1.0 / q) @ model.shapes
    unrelaxed = m_0 * relaxation.unrelaxed_factor(weights, model.omega, model.reference)
    return lambda omega: relaxation.complex_modulus(unrelaxed, weights, model.omega, omega)


def constant_q(q, m_0):
    """Kjartansson's (1979) modulus."""
    return lambda omega: kjartansson(m_0, q, omega, 2.0 * np.pi * FREQUENCY)


def lossy(q):
    """Properties and losses of homogeneous ground, Qp = Qs = q."""
    one, model = np.ones((1, 1)), losses()
    s = DENSITY * VS**2 * model.unrelaxed(one / q)
    shape = model.coefficients(one / q)
    return Properties(DENSITY * one, DENSITY * one, 2.0 * s, 0.0 * s, 2.0 * s, s), Loss(model.omega, model.shapes, shape, shape, shape)


def held_sides(properties):
    """The same ground without vertical motion of its first and last column."""
    heavy = np.array(np.broadcast_to(properties.density_z, (len(properties.density_z), STRIP)))
    heavy[:, [0, -1]] = np.inf
    return replace(properties, density_z=heavy)


def pulse(t):
    """The fourth derivative of a Gaussian: with less low frequency than a Ricker pulse, so that no long tail of it
    drowns what Q has left of the rest."""
    a = (np.pi * 0.9 * FREQUENCY * (t - 1.8 / FREQUENCY)) ** 2
    return (1.0 - 4.0 * a + 4.0 / 3.0 * a**2) * np.exp(-a)


def roller_sides(mesh):
    """Let both sides of a narrow mesh roll, so that S waves going up and down stay plane: vz = 0, sxx = 0 there.

    Velocity vx and stress sxx are closed as on a free side, vz and sxz as on a rigid one (with `held_sides`); both
    pairs conserve energy.
    """
    free, rigid = (line(mesh.nx, edge, edge) for edge in ("free", "rigid"))
    first, weight = free.first.copy(), free.weight.copy()
    first[NODE_MOMENTUM], weight[NODE_MOMENTUM] = rigid.first[NODE_MOMENTUM], rigid.weight[NODE_MOMENTUM]
    vars(mesh)["columns"] = Line(first, weight, free.node_norm, free.half_norm, free.closed)
    return mesh


def strip(h, depth, wave, edges=("absorb", "absorb")):
    """A mesh STRIP columns wide between sides that leave the wave plane; P needs free sides and lambda = 0."""
    mesh = even_mesh(h, (STRIP - 1) * h, depth, ("free", "free", *edges), 20)
    return mesh if wave == "P" else roller_sides(mesh)


def row_of_forces(mesh, depth, wave, pulse):
    """Forces along a row that push all columns alike: they send a plane wave up and another down."""
    h = mesh.spacing
    if wave == "P":
        return [PointSource(i * h, depth, pulse, force=(0.0, 1e5 * h * norm)) for i, norm in enumerate(mesh.columns.node_norm)]
    norms = mesh.columns.half_norm[:-1]
    return [PointSource((i + 0.5) * h, depth, pulse, force=(1e5 * h * norm, 0.0)) for i, norm in enumerate(norms)]


@cache
def spectra(wave, q, ppw=8.0, share=COURANT_SHARE):
    """Spectra of velocity (frequency, 2) near a row of forces and 20 wavelengths further, with that way (m) and dt (s).

    The record ends before the first echo of either end.
    """
    speed = VP if wave == "P" else VS
    wavelength = speed / FREQUENCY
    h = VS / HIGHEST / ppw
    far = WAVELENGTHS * speed / (SHARES * FREQUENCY)
    source = MARGIN * wavelength
    first = source + wavelength
    mesh = strip(h, first + far.max() + source, wave)
    properties, loss = lossy(q)
    properties = properties if wave == "P" else held_sides(properties)
    fastest = np.sqrt(properties.c11.max() / DENSITY)
    duration = (first - source + far.max()) / speed + 9.0 / FREQUENCY
    time = clock(duration, share * stable_step(mesh, fastest), HIGHEST, [pulse])
    points = [(0.5 * STRIP * h, first + way) for way in (0.0, *far)]
    damping = EdgeDamping(fastest, np.pi * FREQUENCY)
    run = Simulation(mesh, properties, damping, time, row_of_forces(mesh, source, wave, pulse), points, np.float64, threads=1, loss=loss)
    run.advance(time.steps)
    run.close()
    times = np.arange(0.0, duration, 1.0 / (16.0 * HIGHEST))
    velocity = run.velocity(times)
    traces, across = (velocity[:, 1], velocity[:, 0]) if wave == "P" else (velocity[:, 0], velocity[:, 1])
    assert np.abs(across).max() < 1e-9 * np.abs(traces).max()  # the wave has stayed plane
    waves = np.exp(-2j * np.pi * FREQUENCY * SHARES[:, None] * times)
    return np.stack([waves @ traces[0], np.sum(waves * traces[1:], axis=1)], axis=1), far, time.dt


def passage(wave, way, law):
    """What a plane wave becomes over `way` (m): exp(-i k way), k = omega sqrt(density/M(omega))."""
    omega = 2.0 * np.pi * FREQUENCY * SHARES
    m_0 = DENSITY * (VP if wave == "P" else VS) ** 2
    return np.exp(-1j * omega * np.sqrt(DENSITY / law(m_0)(omega)) * way)


def errors(wave, q, law, **options):
    """Error of amplitude and of phase (rad), each (frequency,), of the ratio of the two spectra."""
    found, way, _ = spectra(wave, q, **options)
    quotient = found[:, 1] / found[:, 0] / passage(wave, way, law)
    return np.abs(quotient) - 1.0, np.angle(quotient)


def stepped(q, dt):
    """The modulus that time stepping makes of the fitted one (`relaxation.discrete_modulus`), as a law."""

    def law(m_0):
        model = losses()
        weights = model.coefficients(1.0 / q) @ model.shapes
        unrelaxed = m_0 * relaxation.unrelaxed_factor(weights, model.omega, model.reference)
        decay = relaxation.decay_factor(model.omega, dt)
        return lambda omega: relaxation.discrete_modulus(unrelaxed, weights, decay, scheme_frequency(omega, dt), dt)

    return law


CASES = [("P", 20.0), ("S", 20.0), ("S", 10.0)]
SLOW_CASES = [pytest.param(wave, q, marks=pytest.mark.slow) for wave, q in (("P", 10.0), ("P", 100.0), ("S", 100.0))]


@pytest.mark.parametrize(("wave", "q"), CASES + SLOW_CASES)
def test_twenty_wavelengths_of_the_fitted_body(wave, q):
    """Aim: 1 % and 0.02 rad. Measured at most 0.11 % and 0.017 rad at Q = 20, 0.02 % and 0.003 rad at Q = 100.

    At Q = 10 amplitude keeps the aim (0.32 %), phase up to 1.5 times the reference frequency (0.017 rad); at twice it
    misses: 0.032 rad (P), 0.027 rad (S), of time stepping, see the next two tests.
    """
    amplitude, phase = errors(wave, q, partial(modulus, q))
    assert np.abs(amplitude).max() < 0.01
    allowed = np.where((q < 20.0) & (SHARES > 1.5), 0.035, 0.02)
    assert (np.abs(phase) < allowed).all()


@pytest.mark.parametrize(("wave", "q"), CASES + SLOW_CASES)
def test_phase_left_is_that_of_time_stepping(wave, q):
    """The memory variables live at (2/dt) tan(omega dt/2), leapfrog at (2/dt) sin(omega dt/2); the records are freed of the
    latter only. With that in the modulus, what is left is the mesh's (0.006 rad of S at 9.6 points per wavelength)."""
    amplitude, phase = errors(wave, q, stepped(q, spectra(wave, q)[2]))
    assert np.abs(amplitude).max() < 0.003 and np.abs(phase).max() < 0.008


@pytest.mark.slow
def test_phase_left_falls_with_the_square_of_the_step():
    whole, half = (errors("P", 10.0, partial(modulus, 10.0), share=s * COURANT_SHARE)[1] for s in (1.0, 0.5))
    np.testing.assert_allclose(whole / half, 4.0, rtol=0.1, atol=0)


@pytest.mark.parametrize(("wave", "q"), [c for c in CASES if c[1] >= 20.0] + SLOW_CASES[1:])
def test_twenty_wavelengths_of_constant_q(wave, q):
    """1 % and 0.02 rad beyond what the fit itself is off.

    The fit's own: 1/Q within 2 % of constant, hence an amplitude within exp(0.02 * 20 pi/Q) - 1 (6.5 % at Q = 20, 3.4 %
    found); and no losses above the band, which steepens the rise of speed towards its end: 0.126 rad in 20
    wavelengths at Q = 20 and 2.0 times the reference frequency, a speed 0.1 % high.
    """
    assert losses().worst_fit(q) < 0.02
    found, way, _ = spectra(wave, q)
    own = passage(wave, way, partial(modulus, q)) / passage(wave, way, partial(constant_q, q))
    assert np.abs(np.log(np.abs(own))).max() < 0.02 * WAVELENGTHS * np.pi / q
    assert np.abs(np.angle(own)).max() < 0.13 * 20.0 / q
    amplitude, phase = errors(wave, q, partial(constant_q, q))
    assert (np.abs(amplitude) < 0.01 + np.abs(np.abs(own) - 1.0)).all()
    assert (np.abs(phase) < 0.02 + np.abs(np.angle(own))).all()


@pytest.mark.parametrize("mistaken", [19.0, 21.0])
def test_another_q_would_be_seen(mistaken):
    """Mutation: 5 % of Q = 20 is exp(pi/20) - 1, 17 %, over 20 wavelengths."""
    amplitude, _ = errors("S", 20.0, partial(modulus, mistaken))
    assert np.abs(amplitude).min() > 0.1


def test_another_reference_frequency_would_be_seen():
    """Mutation: the speed meant at 12 Hz, not 10 Hz: ln(1.2)/(pi 20), 0.3 % of it."""

    def law(m_0):
        own = modulus(20.0, m_0)
        return lambda omega: own(omega) * m_0 / np.real(np.sqrt(m_0 / own(2.0 * np.pi * 12.0 * np.ones(1)))) ** -2

    assert np.abs(errors("S", 20.0, law)[1]).max() > 0.2


DIRECTIONAL = {"aslant": {"force": (1e5, 3e4)}, "couple": {"moment": (0.0, 0.0, 1e5)}, "explosion": {"moment": (1e5, 1e5, 0.0)}}


@pytest.mark.parametrize("name", DIRECTIONAL)
def test_all_directions(name):
    """Qp = 30, Qs = 10, Vp/Vs = 2, three S wavelengths off: closed form of a full space. Bound: the 0.5 % of the
    elastic case; measured 0.04 % (explosion) to 0.13 % (couple), both components together."""
    vp, qp, qs, h = 2.0 * VS, 30.0, 10.0, VS / HIGHEST / 8.0
    p_law, s_law = modulus(qp, DENSITY * vp**2), modulus(qs, DENSITY * VS**2)
    model, one = losses(), np.ones((1, 1))
    m, mu = DENSITY * vp**2 * model.unrelaxed(one / qp), DENSITY * VS**2 * model.unrelaxed(one / qs)
    at_p, at_s = model.coefficients(one / qp), model.coefficients(one / qs)
    fastest = float(np.sqrt(m / DENSITY).max())
    side = np.ceil(10.0 * VS / FREQUENCY / h) * h
    mesh = even_mesh(h, side, side, ("absorb",) * 4, 20)
    duration, radius = 0.75, 3.0 * VS / FREQUENCY
    ricker = partial(pulses.ricker, frequency=FREQUENCY, delay=1.5 / FREQUENCY)
    time = clock(duration, COURANT_SHARE * stable_step(mesh, fastest), HIGHEST, [ricker])
    angles = np.deg2rad(10.0 + 60.0 * np.arange(6))
    around = np.stack([radius * np.cos(angles), radius * np.sin(angles)], axis=1)
    centre = 0.5 * side + 0.3 * h
    run = Simulation(
        mesh, Properties(DENSITY * one, DENSITY * one, m, m - 2.0 * mu, m, mu), EdgeDamping(fastest, np.pi * FREQUENCY), time,
        [PointSource(centre, centre, ricker, **DIRECTIONAL[name])], [tuple(centre + p) for p in around],
        np.float64, threads=1, loss=Loss(model.omega, model.shapes, at_p, at_s, at_s),
    )
    run.advance(time.steps)
    run.close()
    times = np.linspace(0.0, duration, 241)
    medium = half_space(vp, VS, DENSITY, p_modulus=p_law, s_modulus=s_law)
    exact = np.stack(fullspace.seismograms(medium, LineSource(0.0, 0.0, **DIRECTIONAL[name]), around, ricker, times), axis=1)
    misfit = np.sqrt(np.sum((run.velocity(times) - exact) ** 2, axis=(1, 2)) / np.sum(exact**2, axis=(1, 2)))
    assert misfit.max() < 0.005


THICKNESS, SOIL, ROCK = 10.0, (400.0, 200.0, 1800.0), (1600.0, 800.0, 2200.0)  # vp, vs, density
SOIL_Q, TOP_FREQUENCY, BELOW = 20.0, 30.0, 15.0  # Qs of the soil; Hz; depth of the forces in the rock, m
ENOUGH = 1.8  # s: the slowest resonance has then died to 2e-4
PEAKS = SOIL[1] / (4.0 * THICKNESS) * np.array([1.0, 3.0, 5.0])  # undamped, on rigid rock


def column_scenario(soil):
    """Soil on elastic rock, or bare rock; the solver's own planner makes ground and losses of it."""
    layers = [f"vp = {ROCK[0]}\nvs = {ROCK[1]}\ndensity = {ROCK[2]}"]
    if soil:
        layers.insert(0, f"thickness = {THICKNESS}\nvp = {SOIL[0]}\nvs = {SOIL[1]}\ndensity = {SOIL[2]}\nqp = 40.0\nqs = {SOIL_Q}")
    return Scenario.from_text(f"""
[section]
length = 50.0
depth = 50.0
duration = {ENOUGH}
highest_frequency = {TOP_FREQUENCY}
[mesh]
spacing = {SOIL[1] / TOP_FREQUENCY / 8.0}
[ground]
reference_frequency = 10.0
[[source]]
name = "row"
kind = "force"
x = 20.0
depth = 20.0
force = [1.0, 0.0]
pulse = {{ shape = "ricker", frequency = 12.0 }}
[[receivers]]
name = "top"
at = [[20.0, 0.0]]
""" + "".join(f"[[ground.layer]]\n{text}\n" for text in layers))


@cache
def surface_motion(soil):
    """vx at the surface of soil on rock, or of bare rock, above a row of forces in the rock; its times."""
    made = plan(column_scenario(soil))
    depth = BELOW + (THICKNESS if soil else 0.0)
    mesh = strip(made.mesh.spacing, depth + BELOW, "S", ("free", "absorb"))
    properties, loss, _ = sample(made.model, mesh, made.losses)
    ricker = partial(pulses.ricker, frequency=12.0, delay=1.5 / 12.0)
    time = clock(ENOUGH, COURANT_SHARE * stable_step(mesh, made.fastest), TOP_FREQUENCY, [ricker])
    sources = row_of_forces(mesh, depth, "S", ricker)
    damping = EdgeDamping(made.fastest, np.pi * 12.0)
    point = (0.5 * STRIP * mesh.spacing, 0.0)
    run = Simulation(mesh, held_sides(properties), damping, time, sources, [point], np.float64, threads=1, loss=loss)
    run.advance(time.steps)
    run.close()
    times = np.arange(0.0, ENOUGH, 0.1 / TOP_FREQUENCY)
    return times, run.velocity(times)[0, 0]


def amplification(frequencies):
    """|Surface over outcrop| at `frequencies` (Hz) as computed."""
    times, on_soil = surface_motion(True)
    waves = np.exp(-2j * np.pi * frequencies[:, None] * times)
    return np.abs(waves @ on_soil) / np.abs(waves @ surface_motion(False)[1])


def closed_form(law, frequencies):
    """|F| = 1/|cos kH + i a sin kH|, a the ratio of complex impedances (Kramer 1996, ch. 7)."""
    omega = 2.0 * np.pi * frequencies
    speed = np.sqrt(law(SOIL[2] * SOIL[1] ** 2)(omega) / SOIL[2])
    k_h, a = omega * THICKNESS / speed, SOIL[2] * speed / (ROCK[2] * ROCK[1])
    return 1.0 / np.abs(np.cos(k_h) + 1j * a * np.sin(k_h))


def peaks_of(amplify):
    """(frequency, amplification) of the greatest value within 20 % of each undamped peak."""
    every = [f * np.linspace(0.8, 1.2, 401) for f in PEAKS]
    curves = [amplify(f) for f in every]
    return np.array([[f[c.argmax()], c.max()] for f, c in zip(every, curves, strict=True)])


@pytest.mark.parametrize("law", [partial(modulus, SOIL_Q, highest=TOP_FREQUENCY), partial(constant_q, SOIL_Q)], ids=["fitted", "constant Q"])
def test_resonance_of_a_damped_column(law):
    """2 % asked for in frequency and amplification of three peaks; measured 0.2 % and 0.5 %."""
    found = peaks_of(amplification)
    exact = peaks_of(partial(closed_form, law))
    assert exact[0, 1] > 4.0 > exact[2, 1] > 2.0
    np.testing.assert_allclose(found, exact, rtol=0.02, atol=0)


@pytest.mark.parametrize("mistaken", [16.0, 25.0])
def test_another_q_of_the_column_would_be_seen(mistaken):
    """Mutation: the third peak tells Qs = 16 and 25 from 20."""
    exact = peaks_of(partial(closed_form, partial(modulus, mistaken, highest=TOP_FREQUENCY)))
    assert np.abs(peaks_of(amplification)[2, 1] / exact[2, 1] - 1.0) > 0.04
