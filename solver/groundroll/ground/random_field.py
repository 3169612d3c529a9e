"""Random change of the speeds: a field of mean 0 and variance 1 that depends on the scenario only, not on the mesh."""

import math
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from scipy.fft import next_fast_len
from scipy.special import gamma, kv

from groundroll.errors import InputError
from groundroll.scenario import RandomGround, Scenario

from .bilinear import bracket
from .columns import Columns, split

POINTS_PER_LENGTH = 16.0
LEAST_POINTS_PER_LENGTH = 4.0
MOST_POINTS = 2**24
MARGIN = 8.0
"""Correlation lengths by which the periodic field is longer than the ground, so that its ends are strangers."""
LEAST_FACTOR = 0.25
"""Speeds are not lowered below this share of what they were, however large the standard deviation."""


def correlation(random: RandomGround, r: np.ndarray) -> np.ndarray:
    """Correlation at r = sqrt((dx/length_x)^2 + (dz/length_z)^2).

    gaussian exp(-r^2); exponential exp(-r); von_karman 2^(1-H)/Gamma(H) r^H K_H(r), H the Hurst exponent
    (Frankel & Clayton 1986, table 1).
    """
    if random.kind == "gaussian":
        return np.exp(-(r**2))
    if random.kind == "exponential":
        return np.exp(-r)
    h, some = random.hurst, np.clip(r, 1e-12, 600.0)
    return np.where(r > 0.0, 2.0 ** (1.0 - h) / gamma(h) * some**h * kv(h, some), 1.0)


@dataclass(frozen=True)
class Field:
    """Values (nz, nx) of variance 1 at `depth` (nz,) and `x` (nx,), m; level beyond.

    Between its points the bilinear mean of the four about a place is divided by its standard deviation, which
    follows from the correlations `neighbours` of points one step apart along x, along depth and along both.
    """

    x: np.ndarray
    depth: np.ndarray
    values: np.ndarray
    neighbours: tuple[float, float, float]

    def at(self, x: np.ndarray, depth: np.ndarray) -> np.ndarray:
        """The field at x (m,) and depth (m, n)."""
        left, right, along = (part[:, None] for part in bracket(self.x, x))
        above, below, down = bracket(self.depth, depth)
        upper = self.values[above, left] * (1.0 - along) + self.values[above, right] * along
        lower = self.values[below, left] * (1.0 - along) + self.values[below, right] * along
        return (upper * (1.0 - down) + lower * down) / np.sqrt(self._variance(along, down))

    def _variance(self, along: np.ndarray, down: np.ndarray) -> np.ndarray:
        """Variance of the bilinear mean: sum of w_i w_j C_ij over the four points."""
        cross_x, cross_z = 2.0 * along * (1.0 - along), 2.0 * down * (1.0 - down)
        c_x, c_z, c_both = self.neighbours
        only_x = 1.0 - cross_x * (1.0 - c_x)
        both = (1.0 - cross_x) * c_z + cross_x * c_both
        return (1.0 - cross_z) * only_x + cross_z * both


@lru_cache(maxsize=2)
def standard_field(random: RandomGround, length: float, top: float, bottom: float) -> Field:
    """A realisation over x from 0 to `length` and depth from `top` to `bottom` (m).

    White noise of numpy's PCG64 from the seed, filtered by the root of the spectrum of the correlation on a
    periodic grid (Dietrich & Newsam 1997): mean 0, variance 1 and the correlation exact at the grid's points but
    for its wrapping, below exp(-8). InputError if the grid would be too large.
    """
    extent, lengths = (length, bottom - top), (random.length_x, random.length_z)
    per_length = points_per_length(extent, lengths)
    steps = [a / per_length for a in lengths]
    used = [math.ceil(e / step) + 1 for e, step in zip(extent, steps)]
    whole = [next_fast_len(n + math.ceil(MARGIN * per_length)) for n in used]
    lag_x, lag_z = (np.minimum(np.arange(n), n - np.arange(n)) / per_length for n in whole)
    spectrum = np.fft.rfft2(correlation(random, np.hypot(lag_z[:, None], lag_x))).real
    shape = (whole[1], whole[0])
    noise = np.random.Generator(np.random.PCG64(random.seed)).standard_normal(shape)
    # Rounding and wrapping leave slightly negative powers; they are none.
    filtered = np.fft.rfft2(noise) * np.sqrt(np.maximum(spectrum, 0.0))
    values = np.fft.irfft2(filtered, s=shape)[: used[1], : used[0]].copy()
    values.flags.writeable = False
    neighbours = correlation(random, np.array([1.0, 1.0, math.sqrt(2.0)]) / per_length)
    return Field(steps[0] * np.arange(used[0]), top + steps[1] * np.arange(used[1]), values, tuple(neighbours))


def points_per_length(extent: tuple[float, float], lengths: tuple[float, float]) -> float:
    """Grid points per correlation length: as many as are wanted, fewer where the grid would be too large."""
    spans = [e / a + MARGIN for e, a in zip(extent, lengths)]
    affordable = math.sqrt(MOST_POINTS / math.prod(spans))
    if affordable < LEAST_POINTS_PER_LENGTH:
        shortfall = LEAST_POINTS_PER_LENGTH / affordable
        longer = [float(f"{1.2 * a * shortfall:.2g}") for a in lengths]
        raise InputError(
            f"ground.random: correlation lengths too short for so large a section "
            f"(received length_x = {lengths[0]:g} m, length_z = {lengths[1]:g} m); "
            f"allowed {MOST_POINTS} points at {LEAST_POINTS_PER_LENGTH:g} per length in each direction; "
            f"write length_x = {longer[0]!r} and length_z = {longer[1]!r}, or a smaller section"
        )
    return min(POINTS_PER_LENGTH, affordable)


@dataclass(frozen=True)
class RandomChange:
    """vp and vs times 1 + `deviation` x field between depths `top` and `bottom` (m), in pieces of `thickest` (m)."""

    field: Field
    deviation: float
    top: float
    bottom: float
    thickest: float

    def change(self, columns: Columns, x: np.ndarray, reference: np.ndarray) -> Columns:
        """The ground at x (m,) so changed; depths are measured from z = `reference` (m,)."""
        count = math.ceil((self.bottom - self.top) / self.thickest)
        breaks = np.linspace(self.top, self.bottom, count + 1)
        cut = split(columns, reference[:, None] + breaks)
        depth = cut.middle() - reference[:, None]
        factor = np.maximum(1.0 + self.deviation * self.field.at(x, depth), LEAST_FACTOR)
        inside = (cut.top >= reference[:, None] + self.top) & (cut.top < reference[:, None] + self.bottom)
        factor = np.where(inside, factor, 1.0)
        return replace(cut, vp=cut.vp * factor, vs=cut.vs * factor)


def random_change_of(scenario: Scenario, highest: float, thickest: float) -> RandomChange | None:
    """The random change that a scenario asks for; `highest` elevation (m) of its terrain."""
    random, section = scenario.ground.random, scenario.section
    if random is None:
        return None
    rise = max(highest, 0.0)
    if scenario.ground.depth_from == "surface":
        top, bottom = 0.0, section.depth + rise
    else:
        top, bottom = -rise, section.depth
    field = standard_field(random, section.length, top, bottom)
    span = (top, bottom) if random.depth is None else random.depth
    return RandomChange(field, random.standard_deviation, span[0], span[1], thickest)
