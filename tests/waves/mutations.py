"""Mistakes to be caught: each takes pytest's monkeypatch and spoils the set-up of the next simulations.

Nothing compiled is touched: coefficients, placement and the transforms are all made in Python.
"""

import numpy as np

from groundroll.waves import assembly, dispersion, operators, placement, simulation


def _interior(monkeypatch, coefficients):
    operators.closure()  # kept before the coefficients change: only the interior is to be spoilt
    monkeypatch.setattr(operators, "INTERIOR", coefficients)
    monkeypatch.setattr(assembly, "INTERIOR", coefficients)


def fourth_order(monkeypatch):
    _interior(monkeypatch, (9.0 / 8.0, -1.0 / 24.0, 0.0))


def second_order(monkeypatch):
    _interior(monkeypatch, (1.0, 0.0, 0.0))


def source_half_a_column_off(monkeypatch):
    force, moment = simulation.add_force, simulation.add_moment
    monkeypatch.setattr(
        simulation, "add_force",
        lambda mesh, p, a, b, x, *rest: force(mesh, p, a, b, x + 0.5 * mesh.spacing, *rest),
    )
    monkeypatch.setattr(
        simulation, "add_moment", lambda mesh, p, a, x, *rest: moment(mesh, p, a, x + 0.5 * mesh.spacing, *rest)
    )


def source_half_a_row_off(monkeypatch):
    force, moment = simulation.add_force, simulation.add_moment
    monkeypatch.setattr(
        simulation, "add_force",
        lambda mesh, p, a, b, x, z, *rest: force(mesh, p, a, b, x, z + 0.5 * mesh.spacing, *rest),
    )
    monkeypatch.setattr(
        simulation, "add_moment", lambda mesh, p, a, x, z, *rest: moment(mesh, p, a, x, z + 0.5 * mesh.spacing, *rest)
    )


def receiver_half_a_column_off(monkeypatch):
    placed = simulation.receivers
    monkeypatch.setattr(
        simulation, "receivers",
        lambda mesh, points, n: placed(mesh, [(x + 0.5 * mesh.spacing, z) for x, z in points], n),
    )


def sxz_of_other_sign(monkeypatch):
    moment = simulation.add_moment
    monkeypatch.setattr(
        simulation, "add_moment", lambda mesh, p, a, x, z, m, n: moment(mesh, p, a, x, z, (m[0], m[1], -m[2]), n)
    )


def vertical_force_of_other_sign(monkeypatch):
    force = simulation.add_force
    monkeypatch.setattr(
        simulation, "add_force",
        lambda mesh, p, a, b, x, z, f, n, dt: force(mesh, p, a, b, x, z, (f[0], -f[1]), n, dt),
    )


def surface_traction_without_sxx(monkeypatch):
    """The prescribed traction without its share c13/c33 in sxx."""
    monkeypatch.setattr(placement, "surface_coupling", lambda mesh, p, column: np.zeros(len(column)))


def sources_without_norms(monkeypatch):
    """Unit norms; a vertical force on the surface is put on the first row of vz."""
    monkeypatch.setattr(
        placement, "over_norm",
        lambda mesh, field, cells: np.outer(cells.row_weight, cells.column_weight) / mesh.spacing**2,
    )

    def force(mesh, p, forces, tractions, x, z, f, pulse, dt):
        column, weight = (lambda c: (c.column, c.column_weight))(placement.cells_of(mesh, placement.VZ, x, z))
        forces.add(placement.VZ, [0], column, dt * f[1] * weight / (mesh.spacing**2 * p.density_z.flat[0]), pulse)
        placement.add_force(mesh, p, forces, tractions, x, z, (f[0], 0.0), pulse, dt)

    monkeypatch.setattr(simulation, "add_force", force)


def receivers_on_the_first_half_row(monkeypatch):
    """vz on the surface read half a cell too deep instead of by the closure's trace."""
    cells_of = placement.cells_of

    def spoilt(mesh, field, x, depth):
        cells = cells_of(mesh, field, x, depth)
        if field == placement.VZ and placement.on_surface(mesh, depth):
            return placement.Cells(cells.row[:1], cells.column, np.ones(1), cells.column_weight)
        return cells

    monkeypatch.setattr(placement, "cells_of", spoilt)


def no_predistortion(monkeypatch):
    def as_it_is(pulse, times_in, dt, steps, start=0.0, top=None):
        return np.interp(start + dt * np.arange(steps), times_in, pulse)

    monkeypatch.setattr(dispersion, "predistort", as_it_is)


def no_correction(monkeypatch):
    def as_it_is(traces, dt, times, top, start=0.0, quantity="velocity"):
        at = start + dt * np.arange(traces.shape[1])
        return np.array([np.interp(times, at, trace) for trace in traces])

    monkeypatch.setattr(dispersion, "correct", as_it_is)


def time_dispersion_left_in(monkeypatch):
    no_predistortion(monkeypatch)
    no_correction(monkeypatch)
