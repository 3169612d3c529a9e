"""Constant Q by relaxation: the generalised Maxwell body and its fit.

Relaxation frequencies omega_l (rad/s, l = 1..N) are the same for every material; a material has weights Y_l:
    M(omega) = M_u [1 - sum_l Y_l omega_l / (omega_l + i omega)],   1/Q(omega) = Im M / Re M,
harmonic motion being exp(+i omega t). In time, for each component e of the strain rate (1/s),
    d zeta_l/dt + omega_l zeta_l = omega_l e,   stress rate = M_u (e - sum_l Y_l zeta_l),
where zeta_l knows nothing of the material.
(Emmerich & Korn 1987, Geophysics 52, 1252; Kristek & Moczo 2003, Bull. Seism. Soc. Am. 93, 2273.)
"""

from functools import lru_cache

import numpy as np
from scipy.optimize import linprog, minimize_scalar

from groundroll.errors import ComputationError, InputError

LEAST_Q = 2.0
"""Below this Q no weights are fitted."""
GREATEST_Q = 10_000.0
"""Above this Q the product Y Q no longer changes (to 5e-4)."""
_TABLE_LENGTH = 60
_POINTS_PER_DECADE = 60
_DESIGN_Q = (5.0, 500.0)


def band_frequencies(f_low, f_high, count=4):
    """Return `count` relaxation frequencies (rad/s), evenly spaced in ln f about the band's geometric middle.

    How far they spread (0.3 to 2 times the band's width in ln f) is what makes the larger of the errors of
    1/Q at Q = 5 and Q = 500 least. f_low < f_high in Hz. InputError for an empty band or no frequency.
    """
    _check_band(f_low, f_high)
    if count < 1:
        raise InputError(f"{count} relaxation frequencies were asked for; at least 1 is needed.")
    return 2 * np.pi * np.sqrt(f_low * f_high) * np.array(_offsets(float(f_high / f_low), count))


def fit(q, omega_l, f_low, f_high):
    """Return Y (..., N) for target Qs `q` (...): largest |Q_fit/Q - 1| over f_low..f_high (Hz) near its least.

    Y Q is fitted at 60 Qs from 2 to 10,000 (exact Im M / Re M, Y >= 0) and interpolated linearly in ln Q;
    beyond 10,000 it is kept, so Q = inf gives Y = 0. Passive: sum_l Y_l < 1.
    InputError for an empty band, or a Q that is below 2 or not a number.
    """
    return _interpolate(q, _weight_table(*_key(omega_l, f_low, f_high)))


def shapes(omega_l, f_low, f_high):
    """Return two fixed weight vectors (2, N): Y(Q) is close to shape_coefficients(Q) @ shapes for every Q.

    They are the two leading right singular vectors of the table of Y Q over ln Q, Q = 2..10,000. Two memory
    sums, shapes @ zeta, then do the work of N weights a cell. InputError for fewer than two frequencies.
    """
    return _shape_table(*_key(omega_l, f_low, f_high))[0].copy()


def shape_coefficients(q, omega_l, f_low, f_high):
    """Return (..., 2) coefficients of `shapes` for target Qs `q` (...).

    Fitted (with coefficients @ shapes >= 0) and interpolated as in `fit`; one of the two may be negative.
    """
    return _interpolate(q, _shape_table(*_key(omega_l, f_low, f_high))[1])


def complex_modulus(M_u, Y, omega_l, omega):
    """Return M(omega), shape (..., *omega.shape), for M_u (...) in Pa, Y (..., N), complex omega in rad/s.

    Analytic but for the poles at omega = i omega_l: Im omega <= 0 is always safe.
    """
    omega = np.asarray(omega)[..., None]
    return _modulus(M_u, Y, omega_l / (omega_l + 1j * omega))


def unrelaxed_factor(Y, omega_l, reference_frequency):
    """Return M_u / (rho c²), shape (...), that makes c the phase velocity at `reference_frequency` (Hz).

    With m = M(omega_0)/M_u the wavenumber is omega_0 sqrt(rho/(M_u m)), so the phase velocity is
    sqrt(M_u/rho) / Re(m^(-1/2)), and M_u = rho c² [Re(m^(-1/2))]² = rho c² (|m| + Re m) / (2 |m|²).
    """
    ratio = 2 * np.pi * reference_frequency / np.asarray(omega_l)
    real = 1 - Y @ (1 / (1 + ratio**2))
    size = np.hypot(real, Y @ (ratio / (1 + ratio**2)))
    return (size + real) / (2 * size**2)


def decay_factor(omega_l, dt):
    """Return E_l (N,) of the trapezoidal rule  zeta^(n+1) = E zeta^n + (1 - E) e^(n+1/2).

    E = (1 - omega_l dt/2) / (1 + omega_l dt/2); e is the strain rate between the stress levels n and n+1.
    """
    half = 0.5 * dt * np.asarray(omega_l)
    return (1 - half) / (1 + half)


def discrete_modulus(M_u, Y, decay, omega, dt):
    """Return the modulus that time stepping with step `dt` (s) and decay factors E = `decay` (N,) works with.

    Stress advances by dt M_u [e^(n+1/2) - sum_l Y_l (zeta_l^n + zeta_l^(n+1))/2]. With z = exp(i omega dt)
    the mean of zeta over e is (1 - E)(1 + 1/z) / (2 (1 - E/z)) = 1 / (1 + i (1 + E)/(1 - E) tan(omega dt/2)):
    `decay_factor` gives the continuous modulus at the frequency (2/dt) tan(omega dt/2), exactly. Leapfrog itself
    works at (2/dt) sin(omega dt/2). Shapes as in `complex_modulus`.
    """
    decay = np.asarray(decay)
    turn = np.tan(0.5 * dt * np.asarray(omega))[..., None]
    return _modulus(M_u, Y, 1 / (1 + 1j * (1 + decay) / (1 - decay) * turn))


def _modulus(M_u, Y, memory):
    """M_u (...) [1 - sum_l Y_l memory_l], memory (*omega.shape, N)."""
    relaxed = np.tensordot(Y, memory, axes=(-1, -1))
    M_u = np.asarray(M_u)
    return M_u.reshape(M_u.shape + (1,) * (memory.ndim - 1)) * (1 - relaxed)


def _check_band(f_low, f_high):
    if not 0 < f_low < f_high < np.inf:
        raise InputError(f"the band of constant Q must rise from above 0 Hz; it goes from {f_low} to {f_high} Hz.")


def _key(omega_l, f_low, f_high):
    _check_band(f_low, f_high)
    return tuple(float(x) for x in omega_l), float(f_low), float(f_high)


@lru_cache(maxsize=32)
def _offsets(ratio, count):
    """Relaxation frequencies over the band's middle, for the band 1/sqrt(ratio)..sqrt(ratio)."""
    band = 1 / np.sqrt(ratio), np.sqrt(ratio)

    def spaced(spread):
        return np.exp(0.5 * spread * np.log(ratio) * np.linspace(-1, 1, count)) if count > 1 else np.ones(1)

    def error(spread):
        parts = _parts(2 * np.pi * spaced(spread), *band)
        return max(_minimax(q, *parts, np.eye(count))[1] for q in _DESIGN_Q)

    best = minimize_scalar(error, bounds=(0.3, 2.0), method="bounded", options={"xatol": 3e-3})
    return tuple(spaced(best.x))


def _parts(omega_l, f_low, f_high):
    """(loss, sag), each (frequency, N): Im M = loss @ Y and Re M = 1 - sag @ Y, over M_u, on a log grid."""
    points = max(41, int(np.ceil(_POINTS_PER_DECADE * np.log10(f_high / f_low))) + 1)
    ratio = 2 * np.pi * np.geomspace(f_low, f_high, points)[:, None] / np.asarray(omega_l)
    return ratio / (1 + ratio**2), 1 / (1 + ratio**2)


def _minimax(q, loss, sag, basis):
    """Return (U, error): Y q = U @ basis >= 0 with the least error = max |q Im M / Re M - 1|; basis (size, N).

    Dinkelbach's iteration (Crouzeix & Ferland 1991, Math. Program. 52, 191): with the error reached so far,
    minimise max(|q Im M - Re M| - error Re M), a linear program, until the error falls no more.
    """
    loss, sag = loss @ basis.T, sag @ basis.T / q
    numerator = loss + sag
    ones, error = np.ones(len(loss)), 0.0
    cost = np.append(np.zeros(len(basis)), 1.0)
    floor = np.column_stack([-basis.T, np.zeros(basis.shape[1])])
    for _ in range(20):
        bias = error * sag
        found = linprog(
            cost,
            A_ub=np.block([[bias + numerator, -ones[:, None]], [bias - numerator, -ones[:, None]], [floor]]),
            b_ub=np.concatenate([(error + 1) * ones, (error - 1) * ones, np.zeros(len(floor))]),
            bounds=(None, None),
            method="highs",
        )
        if found.status != 0:
            raise ComputationError(f"the relaxation weights for Q = {q:g} could not be fitted: {found.message}")
        weights = found.x[:-1]
        before, error = error, np.abs(loss @ weights / (1 - sag @ weights) - 1).max()
        if abs(error - before) < 1e-6:
            break
    return weights, error


def _table_q():
    return np.geomspace(LEAST_Q, GREATEST_Q, _TABLE_LENGTH)


@lru_cache(maxsize=8)
def _weight_table(omega_l, f_low, f_high):
    return np.maximum(_table(np.eye(len(omega_l)), omega_l, f_low, f_high), 0.0)


@lru_cache(maxsize=8)
def _shape_table(omega_l, f_low, f_high):
    """(shapes, coefficients over 1/Q): the coefficients are fitted anew once the shapes stand."""
    if len(omega_l) < 2:
        raise InputError("two weight shapes need at least 2 relaxation frequencies.")
    basis = np.linalg.svd(_weight_table(omega_l, f_low, f_high), full_matrices=False)[2][:2]
    return basis, _table(basis, omega_l, f_low, f_high)


def _table(basis, omega_l, f_low, f_high):
    parts = _parts(omega_l, f_low, f_high)
    return np.array([_minimax(q, *parts, basis)[0] for q in _table_q()])


def _interpolate(q, table):
    """Rows of `table` (Y Q at the table's Qs), linear in ln Q, over Q."""
    q = np.asarray(q, dtype=float)
    if not np.all(q >= LEAST_Q):
        raise InputError(f"Q = {q[~(q >= LEAST_Q)].flat[0]:g} cannot be modelled; it must be at least {LEAST_Q:g}.")
    step = np.log(GREATEST_Q / LEAST_Q) / (_TABLE_LENGTH - 1)
    place = np.log(np.minimum(q, GREATEST_Q) / LEAST_Q) / step
    row = np.minimum(place.astype(int), _TABLE_LENGTH - 2)
    share = (place - row)[..., None]
    below = np.take(table, row, axis=0)
    return (below + share * (np.take(table, row + 1, axis=0) - below)) / q[..., None]
