"""What ground is made of: speeds, density, quality factors, and what must hold between them."""

import math
from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import Field

from .literal import plain
from .parts import Part, Problem, Suspicion, Within

LEAST_RATIO = math.sqrt(4.0 / 3.0)
"""Vp / Vs at which the bulk modulus, density (Vp^2 - 4/3 Vs^2), vanishes."""

_KM = "metres per second? this looks like km/s"
PSpeed = Annotated[float, Within("m/s", at_least=50.0, at_most=10000.0, suspicions=(Suspicion(0.05, 10.0, _KM, 1000.0),))]
SSpeed = Annotated[
    float,
    Within(
        "m/s",
        at_least=10.0,
        at_most=6000.0,
        suspicions=(
            Suspicion(0.0, 0.0, "a fluid; only ground that carries shear waves can be computed"),
            Suspicion(0.01, 6.0, _KM, 1000.0),
        ),
    ),
]
Density = Annotated[
    float,
    Within(
        "kg/m3",
        at_least=20.0,
        at_most=10000.0,
        suspicions=(Suspicion(0.02, 10.0, "kilograms per cubic metre? this looks like g/cm3", 1000.0),),
    ),
]
WaterSpeed = Annotated[float, Within("m/s", at_least=1000.0, at_most=2500.0, suspicions=(Suspicion(1.0, 2.5, _KM, 1000.0),))]
Quality = Annotated[float, Within(at_least=2.0, at_most=1e6)]


def slow_p(vp: float | None, vs: float | None, key: str) -> Iterator[Problem]:
    """Vp must exceed sqrt(4/3) Vs."""
    if vp is None or vs is None or vp > LEAST_RATIO * vs:
        return
    yield Problem(
        f"the bulk modulus would not be positive: vp must exceed 1.1547 times vs = {plain(vs)} m/s",
        f"above {plain(LEAST_RATIO * vs)} m/s",
        f"write {{key}} = {float(round(math.sqrt(3.0) * vs))!r} (1.73 times vs)",
        (key,),
    )


def fast_s(vp: float | None, vs: float | None, key: str) -> Iterator[Problem]:
    """Vs must stay below sqrt(3/4) Vp: the same demand, where it is Vs that breaks it."""
    if vp is None or vs is None or vp > LEAST_RATIO * vs:
        return
    yield Problem(
        f"the bulk modulus would not be positive: vs must stay below 0.8660 times vp = {plain(vp)} m/s",
        f"below {plain(vp / LEAST_RATIO)} m/s",
        f"write {{key}} = {float(round(vp / math.sqrt(3.0)))!r} (vp / 1.73)",
        (key,),
    )


class FillMissing(Part):
    """Published relations for what layers and bodies leave out; none of them holds in dry soil."""

    density: Literal["brocher_2005", "gardner_1974"] | None = Field(None, examples=["brocher_2005"])
    """relation that gives density from vp; left out: every density is given"""
    vp: Literal["brocher_2005", "castagna_1985"] | None = Field(None, examples=["brocher_2005"])
    """relation that gives vp from vs; left out: every vp is given"""
    vs: Literal["brocher_2005"] | None = Field(None, examples=["brocher_2005"])
    """relation that gives vs from vp; left out: every vs is given"""


def incomplete(part: Part, fill: FillMissing | None, path: tuple[str | int, ...]) -> Iterator[Problem]:
    """Speeds and density that neither the part nor a relation gives."""
    for key in ("vp", "vs", "density"):
        if getattr(part, key) is None and getattr(fill, key, None) is None:
            yield Problem("missing", path=(*path, key))
    if part.vp is None and part.vs is None and getattr(fill, "vp", None) and getattr(fill, "vs", None):
        yield Problem("missing: no relation gives both vp and vs", path=(*path, "vs"))
