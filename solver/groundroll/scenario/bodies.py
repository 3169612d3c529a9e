"""Pieces of other ground laid over the layers, and random change of the speeds."""

from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import Field

from .material import Density, PSpeed, Quality, SSpeed, slow_p
from .parts import Length, Part, Position, Problem, Row, Suspicion, Within

Span = Annotated[tuple[float, float], Row(("from", "to"), "m, to greater than from")]


def backward(span: tuple[float, float], key: str) -> Iterator[Problem]:
    """A span must end beyond its beginning."""
    if span[1] <= span[0]:
        fix = f"write {{key}} = [{span[0]!r}, {span[0] + 10.0!r}]"
        yield Problem("the span ends where it begins, or before", fix=fix, path=(key,))


class Body(Part):
    """A piece of other ground; depths are measured as `ground.depth_from` says."""

    shape: str
    """form of the body"""
    vp: PSpeed | None = Field(None, examples=[300.0])
    """speed of P waves; left out: by the relation in [ground.fill_missing], or void"""
    vs: SSpeed | None = Field(None, examples=[90.0])
    """speed of S waves; left out: by the relation in [ground.fill_missing], or void"""
    density: Density | None = Field(None, examples=[1700.0])
    """mass density; left out: by the relation in [ground.fill_missing], or void"""
    qp: Quality | None = Field(None, examples=[20.0])
    """quality factor of P waves; left out: elastic"""
    qs: Quality | None = Field(None, examples=[10.0])
    """quality factor of S waves; left out: elastic"""
    void: bool = False
    """whether the body is empty (a trench, a cavity); it then has no properties"""

    def find_problems(self) -> Iterator[Problem]:
        yield from slow_p(self.vp, self.vs, "vp")
        for key in ("vp", "vs", "density", "qp", "qs"):
            if self.void and getattr(self, key) is not None:
                yield Problem("a void has no properties", "no properties with void = true", "remove {key}", (key,))


class RectangleBody(Body):
    """A level rectangle."""

    shape: Literal["rectangle"] = Field(examples=["rectangle"])
    """rectangle: by x and depth; polygon: by its corners; lens: an ellipse"""
    x: Span = Field(examples=[[100.0, 101.0]])
    """where it begins and ends along the section"""
    depth: Span = Field(examples=[[0.0, 4.0]])
    """depth of its top and bottom"""

    def find_problems(self) -> Iterator[Problem]:
        yield from super().find_problems()
        yield from backward(self.x, "x")
        yield from backward(self.depth, "depth")

    def reach(self) -> tuple[float, float]:
        """Least and greatest x of the body (m)."""
        return self.x


class PolygonBody(Body):
    """A polygon, closed from its last corner to the first."""

    shape: Literal["polygon"] = Field(examples=["polygon"])
    """rectangle: by x and depth; polygon: by its corners; lens: an ellipse"""
    points: tuple[Position, ...] = Field(examples=[[[90.0, 2.0], [130.0, 2.0], [110.0, 8.0]]])
    """its corners in turn"""

    def find_problems(self) -> Iterator[Problem]:
        yield from super().find_problems()
        if len(self.points) < 3 or self._twice_area() == 0.0:
            yield Problem("the corners enclose nothing", "three or more [x, depth] in m, not in one line", path=("points",))

    def _twice_area(self) -> float:
        pairs = zip(self.points, (*self.points[1:], self.points[0]))
        return sum(x * other_depth - other_x * depth for (x, depth), (other_x, other_depth) in pairs)

    def reach(self) -> tuple[float, float]:
        """Least and greatest x of the body (m)."""
        return min(x for x, _ in self.points), max(x for x, _ in self.points)


class LensBody(Body):
    """An ellipse with level and upright axes."""

    shape: Literal["lens"] = Field(examples=["lens"])
    """rectangle: by x and depth; polygon: by its corners; lens: an ellipse"""
    centre: Position = Field(examples=[[120.0, 4.0]])
    """its middle"""
    width: Length = Field(examples=[4.0])
    """its whole width"""
    height: Length = Field(examples=[2.0])
    """its whole height"""

    def reach(self) -> tuple[float, float]:
        """Least and greatest x of the body (m)."""
        return self.centre[0] - 0.5 * self.width, self.centre[0] + 0.5 * self.width


AnyBody = Annotated[RectangleBody | PolygonBody | LensBody, Field(discriminator="shape")]


class RandomGround(Part):
    """Random change of vp and vs together about their given values, recorded by its seed."""

    kind: Literal["von_karman", "exponential", "gaussian"] = Field(examples=["von_karman"])
    """form of the correlation in space"""
    standard_deviation: Annotated[
        float,
        Within(above=0.0, at_most=0.5, suspicions=(Suspicion(1.0, 50.0, "a fraction? this looks like per cent", 0.01),)),
    ] = Field(examples=[0.05])
    """standard deviation as a fraction of the speed"""
    length_x: Length = Field(examples=[20.0])
    """correlation length along the section"""
    length_z: Length = Field(examples=[4.0])
    """correlation length in depth"""
    hurst: Annotated[float, Within(above=0.0, at_most=1.0)] | None = Field(None, examples=[0.3])
    """Hurst exponent, of von_karman only; left out: not used by the other kinds"""
    seed: Annotated[int, Within(at_least=0, at_most=2**32 - 1)] = 0
    """number from which the random numbers begin: the same seed gives the same ground"""
    depth: Span | None = Field(None, examples=[[2.0, 30.0]])
    """depths between which the ground is changed; left out: everywhere"""

    def find_problems(self) -> Iterator[Problem]:
        if self.kind == "von_karman" and self.hurst is None:
            yield Problem('missing: kind = "von_karman" needs it', path=("hurst",))
        if self.kind != "von_karman" and self.hurst is not None:
            yield Problem(f'not used by kind = "{self.kind}"', 'only with kind = "von_karman"', "remove {key}", ("hurst",))
        if self.depth is not None:
            yield from backward(self.depth, "depth")
