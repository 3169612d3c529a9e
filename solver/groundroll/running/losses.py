"""Attenuation of a scenario: the band of constant Q, and moduli from phase speeds at the reference frequency."""

from dataclasses import dataclass

import numpy as np

from groundroll.errors import InputError
from groundroll.ground.model import GroundModel
from groundroll.running.choices import reference_frequency
from groundroll.scenario import Scenario
from groundroll.waves import relaxation
from groundroll.waves.cell import MECHANISMS

DECADES = 2.0
# The ground is looked at in this many columns to find its fastest unrelaxed wave.
LOOKS = 65


@dataclass(frozen=True)
class LossModel:
    """Constant Q between `low` and `high` (Hz) by relaxations at `omega` (rad/s); speeds meant at `reference` (Hz)."""

    low: float
    high: float
    reference: float
    omega: np.ndarray

    def coefficients(self, inverse_q) -> np.ndarray:
        """Return the coefficients of both shapes, (2, ...)."""
        with np.errstate(divide="ignore"):
            q = 1.0 / np.asarray(inverse_q, dtype=float)
        return np.moveaxis(relaxation.shape_coefficients(q, self.omega, self.low, self.high), -1, 0)

    @property
    def shapes(self) -> np.ndarray:
        return relaxation.shapes(self.omega, self.low, self.high)

    def unrelaxed(self, inverse_q) -> np.ndarray:
        """Return the unrelaxed modulus over rho c^2, c the phase speed at the reference frequency."""
        weights = np.tensordot(np.moveaxis(self.coefficients(inverse_q), 0, -1), self.shapes, axes=(-1, 0))
        return relaxation.unrelaxed_factor(weights, self.omega, self.reference)

    def worst_fit(self, q: float) -> float:
        """Return max |Q/Q_fit - 1| over the band for a ground of quality factor `q`."""
        weights = self.coefficients(1.0 / q) @ self.shapes
        omega = 2.0 * np.pi * np.geomspace(self.low, self.high, 200)
        modulus = relaxation.complex_modulus(1.0, weights, self.omega, omega)
        return float(np.abs(modulus.imag / modulus.real * q - 1.0).max())


def loss_model(scenario: Scenario, model: GroundModel) -> LossModel | None:
    """Return the attenuation of a scenario, or None if no ground in it damps."""
    if not np.isfinite(lowest_quality(scenario, model)):
        return None
    check_bulk_loss(scenario, model)
    high = scenario.section.highest_frequency
    low = high / 10.0**DECADES
    omega = relaxation.band_frequencies(low, high, MECHANISMS)
    return LossModel(low, high, reference_frequency(scenario), omega)


def check_bulk_loss(scenario: Scenario, model: GroundModel) -> None:
    """Refuse ground whose bulk modulus would give energy: vp^2/qp must be at least 4/3 vs^2/qs.

    With K = rho (vp^2 - 4/3 vs^2) the losses of P, S and bulk are joined by  vp^2/qp = (K/rho)/qk + 4/3 vs^2/qs
    (Aki & Richards, Quantitative Seismology, ch. 5; from memory), and qk must not be negative.
    """
    for pieces in looks(scenario, model):
        least = 4.0 / 3.0 * pieces.vs**2 / pieces.qs
        wrong = np.flatnonzero(pieces.vp**2 / pieces.qp < least * (1.0 - 1e-9))
        if len(wrong):
            vp, vs, qp, qs = (float(getattr(pieces, name)[wrong[0]]) for name in ("vp", "vs", "qp", "qs"))
            most = 0.75 * (vp / vs) ** 2 * qs
            given = "no qp" if np.isinf(qp) else f"qp = {qp:g}"
            raise InputError(
                f"ground: with qs = {qs:g}, vp = {vp:g} and vs = {vs:g} m/s the bulk modulus would give energy "
                f"(received {given}); allowed: qp up to 0.75 (vp/vs)^2 qs = {most:.4g}; write qp = {np.floor(most):g} or less"
            )


def looks(scenario: Scenario, model: GroundModel):
    count = 1 if model.laterally_uniform else LOOKS
    return [model.pieces(float(x)) for x in np.linspace(0.0, scenario.section.length, count)]


def lowest_quality(scenario: Scenario, model: GroundModel) -> float:
    return float(min(min(p.qp.min(), p.qs.min()) for p in looks(scenario, model)))


def fastest_unrelaxed(scenario: Scenario, model: GroundModel, losses: LossModel | None) -> float:
    """Return the fastest P wave at infinite frequency (m/s), which limits the time step."""
    if losses is None:
        return model.fastest_p
    found = [(p.vp * np.sqrt(losses.unrelaxed(1.0 / p.qp))).max() for p in looks(scenario, model)]
    return float(max(model.fastest_p, *found))
