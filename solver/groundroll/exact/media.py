"""A layer of ground and its complex moduli. Harmonic motion is exp(+i omega t) throughout this room."""

from collections.abc import Callable
from dataclasses import dataclass
from math import inf, isfinite

import numpy as np

from groundroll.errors import InputError

Modulus = Callable[[np.ndarray], np.ndarray]


@dataclass(frozen=True)
class Layer:
    """One homogeneous isotropic layer.

    thickness (m; inf for the half-space), vp and vs (m/s: phase velocities at the reference frequency),
    density (kg/m³), qp and qs (inf: elastic). `p_modulus` and `s_modulus`, if given, are the complex
    lambda + 2 mu and mu (Pa) as functions of complex angular frequency (rad/s, Re >= 0, Im <= 0) and take
    the place of vp, qp and vs, qs.
    """

    thickness: float
    vp: float
    vs: float
    density: float
    qp: float = inf
    qs: float = inf
    p_modulus: Modulus | None = None
    s_modulus: Modulus | None = None

    def __post_init__(self):
        for name in ("vp", "vs", "density"):
            value = getattr(self, name)
            if not (isfinite(value) and value > 0):
                raise InputError(f"{name} = {value} of a layer must be a positive number.")
        for name in ("thickness", "qp", "qs"):
            if not getattr(self, name) > 0:
                raise InputError(f"{name} = {getattr(self, name)} of a layer must be above 0.")
        if self.vp <= self.vs:
            raise InputError(f"vp = {self.vp} m/s of a layer must be above its vs = {self.vs} m/s.")


def half_space(vp, vs, density, qp=inf, qs=inf, p_modulus=None, s_modulus=None):
    """The layer that goes on down for ever."""
    return Layer(inf, vp, vs, density, qp, qs, p_modulus, s_modulus)


def kjartansson(modulus, q, omega, reference):
    """Constant-Q modulus M(omega), Kjartansson (1979, JGR 84:4737), eqs 16 to 18 and 29 (numbers from memory).

    M = M0 cos²(pi g / 2) (i omega / reference)^(2 g), g = arctan(1/q) / pi: the phase velocity at
    `reference` (rad/s) is exactly sqrt(M0 / density). `modulus` M0 in Pa.
    """
    exponent = np.arctan(1.0 / q) / np.pi
    return modulus * np.cos(np.pi * exponent / 2) ** 2 * (1j * omega / reference) ** (2 * exponent)


def hysteretic(modulus, q, omega, reference):
    """Frequency-independent complex modulus M0 (1 + i / q); with damping ratio xi, q = 1 / (2 xi)."""
    return modulus * (1 + 1j / q) * np.ones_like(omega)


LAWS = {"kjartansson": kjartansson, "hysteretic": hysteretic}


def complex_moduli(layer, omega, reference_frequency=10.0, law="kjartansson"):
    """(lambda + 2 mu, mu) of a layer, complex (Pa), at complex angular frequencies `omega` (any shape)."""
    if law not in LAWS:
        raise InputError(f'law = "{law}" is not known; choose one of {", ".join(LAWS)}.')
    omega = np.asarray(omega, dtype=complex)
    reference = 2 * np.pi * reference_frequency

    def one(speed, q, given):
        if given is not None:
            return np.asarray(given(omega), dtype=complex) * np.ones_like(omega)
        return LAWS[law](layer.density * speed**2, q, omega, reference)

    return one(layer.vp, layer.qp, layer.p_modulus), one(layer.vs, layer.qs, layer.s_modulus)


def complex_speeds(layer, omega, reference_frequency=10.0, law="kjartansson"):
    """(alpha, beta), complex wave speeds (m/s); phase velocity is 1 / Re(1 / alpha)."""
    p_modulus, s_modulus = complex_moduli(layer, omega, reference_frequency, law)
    return np.sqrt(p_modulus / layer.density), np.sqrt(s_modulus / layer.density)
