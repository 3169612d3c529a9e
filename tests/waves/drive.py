"""How the tests drive the solver: uniform and layered ground, simulations in wavelengths, misfits.

A truth case is stated in Rayleigh (or S) wavelengths at the pulse's centre frequency and in points per
wavelength `ppw` = vs/(highest frequency)/h, highest frequency = 2.3966 times the Ricker frequency.
"""

from dataclasses import dataclass, replace
from functools import partial

import numpy as np

from groundroll.exact.media import half_space
from groundroll.exact.rayleigh import speed_ratio
from groundroll.waves import pulses, simulation
from groundroll.waves.assembly import EdgeDamping, Properties
from groundroll.waves.march import Order
from groundroll.waves.mesh import even_mesh
from groundroll.waves.simulation import Clock, PointSource, Simulation, clock
from groundroll.waves.state import inner

VS, DENSITY, FREQUENCY, LAYER = 200.0, 1800.0, 10.0, 20
# Limit of Vp dt/h, interior bound: 1/(sqrt(2) sum |c|) (Levander 1988 carried to 6th order).
LIMIT = 1.0 / (np.sqrt(2.0) * (75.0 / 64.0 + 25.0 / 384.0 + 3.0 / 640.0))
COURANT = 0.95 * LIMIT
FREE_TOP = ("absorb", "absorb", "free", "absorb")
FULL_SPACE = ("absorb",) * 4
FREE_BOX = ("free",) * 4
STRIPS = Order(steps=8, strip=512)


def uniform(vp, vs=VS, density=DENSITY) -> Properties:
    """Homogeneous ground."""
    one = np.ones((1, 1))
    p, s = density * vp**2 * one, density * vs**2 * one
    return Properties(density * one, density * one, p, p - 2.0 * s, p, s)


def rough(mesh, vp, vs=VS, seed=1) -> Properties:
    """Ground that differs from cell to cell, no faster than vp and no slower than 0.6 vs."""
    draw = np.random.default_rng(seed)

    def share(low):
        return draw.uniform(low, 1.0, (mesh.nz, mesh.nx))

    p = DENSITY * (vp * share(0.9)) ** 2
    s = DENSITY * (vs * share(0.6)) ** 2
    heavy = DENSITY * draw.uniform(1.0, 1.2, (2, mesh.nz, mesh.nx))
    return Properties(heavy[0], heavy[1], p, p - 2.0 * s, p, DENSITY * (vs * share(0.6)) ** 2)


def ricker(frequency=FREQUENCY, delay=None):
    """The pulse of most tests; it starts at 5e-9 of its peak."""
    return partial(pulses.ricker, frequency=frequency, delay=delay or pulses.DEFAULT_DELAY / frequency)


def spacing(ppw, vs=VS, frequency=FREQUENCY):
    return vs / (pulses.RICKER_BAND * frequency) / ppw


def all_steps(mesh, ground, vp, sources, points, steps, dtype=np.float64, order=STRIPS, threads=1, loss=None):
    """A simulation of `steps` steps at 0.95 of the limit, ready to advance."""
    dt = COURANT * mesh.spacing / vp
    time = Clock(dt, steps, steps * dt, 6.0 * FREQUENCY)
    damping = EdgeDamping(vp, np.pi * FREQUENCY)
    return Simulation(mesh, ground, damping, time, sources, points, dtype, order, threads, loss)


def interior(simulation_):
    """The five fields without margins, each (row, column)."""
    return [inner(f, simulation_.mesh) for f in simulation_.march.fields]


def unlayered(mesh):
    """The same mesh without absorbing layers: edges called "absorb" are cut-off interior stencils."""
    return replace(mesh, absorbing=(0, 0, 0, 0))


@dataclass(frozen=True)
class Record:
    """Velocity found (receiver, 2, time) and all that a reference solution needs."""

    times: np.ndarray
    found: np.ndarray
    medium: object
    pulse: object
    source: PointSource
    points: list
    simulation: Simulation


def shoot(ratio, ppw, source, points, duration, edges=FREE_TOP, pulse=None, margin=4.0, quantity="velocity"):
    """Run one source in homogeneous ground of Vp/Vs = `ratio` and return the `Record`.

    `source` is a PointSource and `points` its receivers (x, depth), x from the source's own; `margin` (Rayleigh
    wavelengths) of ground lies outside them. The source stands 0.3 of a cell beside a node.
    """
    vp, h, pulse = VS * ratio, spacing(ppw), pulse or ricker()
    wavelength = VS * speed_ratio(ratio) / FREQUENCY
    xs = np.array([x for x, _ in points] + [0.0])
    zs = np.array([z for _, z in points] + [source.depth])
    shift = np.round((margin * wavelength - xs.min()) / h) * h + 0.3 * h
    top = 0.0 if edges[2] == "free" else np.round((margin * wavelength - zs.min()) / h) * h
    length = np.ceil((shift + xs.max() + margin * wavelength) / h) * h
    depth = np.ceil((top + zs.max() + margin * wavelength) / h) * h
    mesh = even_mesh(h, length, depth, edges, LAYER)
    placed = replace(source, x=shift, depth=top + source.depth, pulse=pulse)
    time = clock(duration, COURANT * h / vp, pulses.RICKER_BAND * FREQUENCY, [pulse])
    run = simulation.Simulation(
        mesh, uniform(vp), EdgeDamping(vp, np.pi * FREQUENCY), time, [placed],
        [(shift + x, top + z) for x, z in points], np.float64, STRIPS, 1,
    )
    run.advance(time.steps)
    times = np.linspace(0.0, duration, int(duration * FREQUENCY * 16) + 1)
    found = run.motion(times, quantity)
    return Record(times, found, half_space(vp, VS, DENSITY), pulse, source, points, run)


def misfit(found, truth):
    """Relative L2 misfit, (receiver, component), of traces found (receiver, 2, time) against (x, z) traces.

    A component that is nowhere more than a thousandth of the other is measured against both together.
    """
    truth = np.stack(truth, axis=1)
    norm = np.sqrt(np.sum(truth**2, axis=2))
    both = np.sqrt(np.sum(norm**2, axis=1, keepdims=True))
    return np.sqrt(np.sum((found - truth) ** 2, axis=2)) / np.where(norm < 1e-3 * both, both, norm)


def joint_misfit(found, truth):
    """Relative L2 misfit of both components together, (receiver,)."""
    truth = np.stack(truth, axis=1)
    return np.sqrt(np.sum((found - truth) ** 2, axis=(1, 2)) / np.sum(truth**2, axis=(1, 2)))
