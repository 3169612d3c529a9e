"""Gauss quadrature on panels, and derivatives of a pulse, for the closed forms in time."""

import numpy as np

from groundroll.errors import InputError

ORDER = 12
NODES, WEIGHTS = np.polynomial.legendre.leggauss(ORDER)


def panels(edges):
    """Nodes and weights (panel * 12,) on the panels between ascending `edges`."""
    edges = np.asarray(edges, dtype=float)
    half = np.diff(edges)[:, None] / 2
    middle = (edges[:-1] + edges[1:])[:, None] / 2
    return (middle + half * NODES).ravel(), (half * WEIGHTS).ravel()


def even_panels(start, end, width):
    """Panels no wider than `width` from start to end."""
    return panels(np.linspace(start, end, max(int(np.ceil((end - start) / width)), 1) + 1))


def derivative(pulse, time, step, order):
    """s(t), or its first or second derivative by the five-point formulas, error (omega step)^4 / 30.

    The pulse is called up to two steps before 0, where it should go on smoothly.
    """
    if order == 0:
        return pulse(time)
    near = pulse(time - step), pulse(time + step)
    far = pulse(time - 2 * step), pulse(time + 2 * step)
    if order == 1:
        return (8 * (near[1] - near[0]) - (far[1] - far[0])) / (12 * step)
    return (16 * (near[0] + near[1]) - (far[0] + far[1]) - 30 * pulse(time)) / (12 * step**2)


def response(nodes, weighted, pulse, times, order):
    """Sum over nodes of weighted (component, node) times the order-th derivative of s(t - node): (component, time)."""
    step = (times[1] - times[0]) / 20
    result = np.zeros((len(weighted), len(times)))
    for n, t in enumerate(times):
        due = nodes <= t
        result[:, n] = weighted[:, due] @ derivative(pulse, t - nodes[due], step, order)
    return result


def order_of(quantity, displacement_order):
    """How often the pulse is differentiated for a quantity."""
    extra = {"displacement": 0, "velocity": 1}.get(quantity)
    if extra is None:
        raise InputError(f'quantity = "{quantity}" is not one of displacement, velocity.')
    return displacement_order + extra
