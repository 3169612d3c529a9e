"""Sources and their pulses, receivers."""

from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import Field

from .literal import literal
from .parts import Along, DepthFrom, FileName, Frequency, Name, Part, Position, Problem, Row, Suspicion, Within, above_ground

Seconds = Annotated[
    float,
    Within("s", at_least=0.0, at_most=600.0, suspicions=(Suspicion(600.0, 6e5, "seconds? this looks like milliseconds", 1e-3),)),
]
PulseSeconds = Annotated[
    float,
    Within("s", above=0.0, at_most=600.0, suspicions=(Suspicion(600.0, 6e5, "seconds? this looks like milliseconds", 1e-3),)),
]
Depth = Annotated[float, Within("m", at_least=-1e4, at_most=1e6)]


class Pulse(Part):
    """How a source acts in time: a shape of peak 1, or a file of time and value taken as it is.

    With a = (pi f (t - delay))^2: `ricker` (1 - 2a) exp(-a); `gaussian` exp(-a); `gaussian_slope` the
    time derivative of `gaussian` scaled to peak 1; `half_sine` sin(pi (t - delay) / duration) while
    delay < t < delay + duration.
    """

    shape: Literal["ricker", "gaussian", "gaussian_slope", "half_sine"] | None = Field(None, examples=["ricker"])
    """form of the pulse, of peak 1; left out: the pulse comes from `file`"""
    frequency: Frequency | None = Field(None, examples=[20.0])
    """frequency f of ricker, gaussian and gaussian_slope; left out: not used by half_sine and file"""
    duration: PulseSeconds | None = Field(None, examples=[0.012])
    """length of a half_sine; left out: not used by the other shapes"""
    delay: Seconds | None = Field(None, examples=[0.075])
    """time of the peak, for half_sine of its start; left out: 1.5 / frequency (starts below 1e-5 of its peak), half_sine 0"""
    file: FileName | None = Field(None, examples=["pulse.csv"])
    """columns time (s) and value, taken as they are; left out: the pulse has a `shape`"""

    def find_problems(self) -> Iterator[Problem]:
        if (self.shape is None) == (self.file is None):
            yield Problem(
                "a pulse has either a shape or a file",
                "exactly one of shape, file",
                "remove file" if self.shape else 'add shape = "ricker"',
            )
            return
        yield from self._wrong_keys()

    def _wrong_keys(self) -> Iterator[Problem]:
        kind = f'shape = "{self.shape}"' if self.shape else "a pulse from a file"
        needed = {None: None, "half_sine": "duration"}.get(self.shape, "frequency")
        if needed and getattr(self, needed) is None:
            yield Problem(f"missing: {kind} needs it", path=(needed,))
        usable = {needed, "delay"} if self.shape else set()
        for key in ("frequency", "duration", "delay"):
            if key not in usable and getattr(self, key) is not None:
                keys = ", ".join(sorted(usable - {None})) or "no further key"
                yield Problem(f"not used by {kind}", f"{keys} with {kind}", "remove {key}", (key,))


class Source(Part):
    """Where a source sits and how it acts in time."""

    name: Name = Field(examples=["pile"])
    """name of the source, used once"""
    kind: str = Field(examples=["force"])
    """what the source is"""
    x: Along = Field(examples=[60.0])
    """distance along the section"""
    depth: Depth = Field(examples=[1.0])
    """depth of the source"""
    depth_from: DepthFrom = "surface"
    """where depth is measured from: the ground surface above, or the level datum"""
    pulse: Pulse
    """how the source acts in time"""

    def find_problems(self) -> Iterator[Problem]:
        if self.depth_from == "surface" and self.depth < 0.0:
            yield above_ground(("depth",), self.depth)


class ForceSource(Source):
    """A line of force: adds f s(t) delta(x) delta(z) to density times acceleration."""

    kind: Literal["force"] = Field(examples=["force"])
    """force: a push; moment: a moment tensor; explosion: the same push in all directions"""
    force: Annotated[tuple[float, float], Row(("fx", "fz"), "N per metre of line, fz downward")] = Field(examples=[[0.0, 1.0e5]])
    """peak force along x and down"""

    def find_problems(self) -> Iterator[Problem]:
        yield from super().find_problems()
        if not any(self.force):
            yield Problem("a source of no strength", path=("force",))


class MomentSource(Source):
    """A line moment tensor M: the body force -div(M s(t) delta delta)."""

    kind: Literal["moment"] = Field(examples=["moment"])
    """force: a push; moment: a moment tensor; explosion: the same push in all directions"""
    moment: Annotated[tuple[float, float, float], Row(("Mxx", "Mzz", "Mxz"), "N (N m per metre of line)")] = Field(
        examples=[[0.0, 0.0, 1.0e6]]
    )
    """peak moment tensor; z down"""

    def find_problems(self) -> Iterator[Problem]:
        yield from super().find_problems()
        if not any(self.moment):
            yield Problem("a source of no strength", path=("moment",))


class ExplosionSource(Source):
    """A line explosion: Mxx = Mzz = M."""

    kind: Literal["explosion"] = Field(examples=["explosion"])
    """force: a push; moment: a moment tensor; explosion: the same push in all directions"""
    moment: Annotated[float, Within("N (N m per metre of line)", at_least=-1e18, at_most=1e18)] = Field(examples=[1.0e6])
    """peak moment M; positive pushes outward"""

    def find_problems(self) -> Iterator[Problem]:
        yield from super().find_problems()
        if self.moment == 0.0:
            yield Problem("a source of no strength", path=("moment",))


AnySource = Annotated[ForceSource | MomentSource | ExplosionSource, Field(discriminator="kind")]


class Receivers(Part):
    """A named set of receivers: evenly spread over a line, or listed one by one."""

    name: Name = Field(examples=["street"])
    """name of the set, used once; its records are found under it"""
    start: Position | None = Field(None, alias="from", examples=[[80.0, 0.0]])
    """first receiver of a line; left out: the receivers are listed in `at`"""
    end: Position | None = Field(None, alias="to", examples=[[220.0, 0.0]])
    """last receiver of a line; left out: the receivers are listed in `at`"""
    count: Annotated[int, Within(at_least=1, at_most=100_000)] | None = Field(None, examples=[15])
    """number of receivers from `from` to `to`, evenly spread, both ends included (1: at `from`); left out: see `at`"""
    at: tuple[Position, ...] | None = Field(None, examples=[[[150.0, 0.0], [150.0, 3.0]]])
    """receivers one by one; left out: a line by `from`, `to`, `count`"""
    depth_from: DepthFrom = "surface"
    """where depths are measured from: the ground surface above, or the level datum"""

    def find_problems(self) -> Iterator[Problem]:
        line = {"from": self.start, "to": self.end, "count": self.count}
        given = [key for key, value in line.items() if value is not None]
        if (self.at is not None) == bool(given):
            yield Problem(
                "receivers stand either on a line or at listed places",
                "either from, to and count, or at",
                f"remove {' and '.join(given)}" if given else "add at = [[150.0, 0.0]]",
            )
            return
        if given:
            yield from self._line_problems(line)
        elif not self.at:
            yield Problem("an empty list", "one or more [x, depth] in m", path=("at",))
        yield from self._depth_problems()

    def _line_problems(self, line: dict) -> Iterator[Problem]:
        for key, value in line.items():
            if value is None:
                yield Problem("missing: a line needs from, to and count", path=(key,))
        if None not in line.values() and self.start == self.end and self.count > 1:
            yield Problem(
                f"{self.count} receivers in one place",
                f"an end other than from = {literal(self.start)}, or count = 1",
                "write count = 1",
                ("to",),
            )

    def _depth_problems(self) -> Iterator[Problem]:
        if self.depth_from == "surface":
            for path, (_, depth) in self.places():
                if depth < 0.0:
                    yield above_ground(path, depth)

    def places(self) -> list[tuple[tuple[str | int, ...], tuple[float, float]]]:
        """Each position that was written, with its path in this part."""
        if self.at is not None:
            return [(("at", index), place) for index, place in enumerate(self.at)]
        return [((key,), place) for key, place in (("from", self.start), ("to", self.end)) if place is not None]
