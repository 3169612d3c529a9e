"""Kernels of point sources and receivers: a few weighted cells each, sorted by band."""

from typing import NamedTuple

import numpy as np

from groundroll.waves.jit import kernel

U = np.uint64


class Injection(NamedTuple):
    """Cells that sources feed: entries first[band] .. first[band + 1] - 1 belong to a band.

    Each adds weight * series[pulse, step] to the field `field` (0, 1: vx, vz; 2, 3, 4: sxx, szz, sxz)
    at (`row`, `column`)."""

    first: np.ndarray
    row: np.ndarray
    column: np.ndarray
    field: np.ndarray
    weight: np.ndarray
    pulse: np.ndarray
    series: np.ndarray


class Sources(NamedTuple):
    """What is added after the velocity stage and after the stress stage of a step."""

    force: Injection
    moment: Injection


class Receivers(NamedTuple):
    """Cells that receivers read after each velocity stage, sorted by band as in `Injection`.

    Each adds weight * velocity to trace[step of the pass, slot]. A slot is one column of one receiver's
    cells: its sum then runs down the rows in every marching order, and so has the same bits."""

    first: np.ndarray
    row: np.ndarray
    column: np.ndarray
    field: np.ndarray
    weight: np.ndarray
    slot: np.ndarray
    trace: np.ndarray


@kernel
def add_sources(band, a, b, step, frame, f, injection):
    """Add to the fields what sources feed into a band on columns a..b-1 at `step`."""
    for e in range(injection.first[band], injection.first[band + U(1)]):
        i = injection.column[e]
        if a <= i and i < b:
            at = frame.origin + injection.row[e] * frame.pitch + i
            amount = injection.weight[e] * injection.series[injection.pulse[e], step]
            field = injection.field[e]
            if field == 0:
                f.vx[at] += amount
            elif field == 1:
                f.vz[at] += amount
            elif field == 2:
                f.sxx[at] += amount
            elif field == 3:
                f.szz[at] += amount
            else:
                f.sxz[at] += amount


@kernel
def note_receivers(band, a, b, row_of_trace, frame, f, receivers):
    """Add to the traces what receivers read from a band on columns a..b-1."""
    for e in range(receivers.first[band], receivers.first[band + U(1)]):
        i = receivers.column[e]
        if a <= i and i < b:
            at = frame.origin + receivers.row[e] * frame.pitch + i
            value = f.vx[at] if receivers.field[e] == 0 else f.vz[at]
            receivers.trace[row_of_trace, receivers.slot[e]] += receivers.weight[e] * value
