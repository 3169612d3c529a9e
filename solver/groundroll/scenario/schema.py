"""The scenario: all that the user can ask for, each key with its type, unit, range, default and meaning."""

from collections.abc import Iterator
from pathlib import Path
from typing import Annotated, Literal

from pydantic import Field, PrivateAttr

from . import checks
from .ground_schema import Ground
from .parts import Frequency, Length, Part, Problem, Within
from .source_schema import AnySource, PulseSeconds, Receivers

Edge = Literal["absorb", "free", "rigid"]
Quantity = Literal["displacement", "velocity", "acceleration"]
SnapshotField = Literal["velocity_x", "velocity_z"]


class Section(Part):
    """The piece of ground that is computed, and for how long."""

    length: Length = Field(examples=[240.0])
    """length along x, from 0"""
    depth: Length = Field(examples=[60.0])
    """depth below the datum"""
    duration: PulseSeconds = Field(examples=[1.2])
    """time that is computed"""
    highest_frequency: Frequency = Field(examples=[40.0])
    """the result must be right up to here"""
    geometry: Literal["line", "point"] = "line"
    """line: sources are lines across the section; point: seismograms are converted to a point source"""


class Edges(Part):
    """What happens at the four edges of the section."""

    left: Edge = "absorb"
    """edge at x = 0"""
    right: Edge = "absorb"
    """edge at x = length"""
    bottom: Edge = "absorb"
    """lower edge"""
    top: Literal["free", "absorb"] = "free"
    """upper edge: the free ground surface, or absorbing as if the ground went on"""


class Mesh(Part):
    """How finely the section is computed."""

    spacing: Length | None = Field(None, examples=[0.5])
    """distance between mesh points; left out: chosen from highest_frequency, the slowest wave and accuracy"""
    graded: bool = False
    """whether the spacing may grow with depth where the ground is faster"""
    accuracy: Annotated[float, Within(at_least=1e-4, at_most=0.2)] = 0.01
    """target relative error of a seismogram (numerical, not geological)"""
    precision: Literal["single", "double"] = "single"
    """length of the numbers in the computation"""
    edges: Edges = Edges()
    """what happens at the four edges"""


class Snapshots(Part):
    """Pictures of the whole section at equal times."""

    every: PulseSeconds = Field(examples=[0.02])
    """time between snapshots"""
    fields: tuple[SnapshotField, ...] = ("velocity_x", "velocity_z")
    """what is kept; velocity_z > 0 is downward"""

    def find_problems(self) -> Iterator[Problem]:
        yield from each_once(self.fields, "fields")


class Output(Part):
    """What is kept of the seismograms."""

    sample_interval: PulseSeconds | None = Field(None, examples=[0.001])
    """time between the samples of seismograms; left out: chosen from highest_frequency"""
    quantities: tuple[Quantity, ...] = ("velocity",)
    """which motions are kept"""

    def find_problems(self) -> Iterator[Problem]:
        yield from each_once(self.quantities, "quantities")


def each_once(words: tuple[str, ...], key: str) -> Iterator[Problem]:
    """A list of words must not be empty nor repeat itself."""
    if not words:
        yield Problem("an empty list", path=(key,))
    for index, word in enumerate(words):
        if word in words[:index]:
            yield Problem("listed twice", "each word once", f'remove one "{word}"', (key, index))


class Scenario(Part):
    """All that a run is asked to do. Lengths in m, times in s, depth downward."""

    title: str = Field("", examples=["Pile driving beside a clinic"])
    """what the scenario is about"""
    section: Section
    """the piece of ground that is computed, and for how long"""
    mesh: Mesh = Mesh()
    """how finely it is computed"""
    ground: Ground
    """what the section is made of"""
    sources: tuple[AnySource, ...] = Field(alias="source")
    """what shakes the ground"""
    receivers: tuple[Receivers, ...] = ()
    """where seismograms are recorded"""
    snapshots: Snapshots | None = None
    """pictures of the whole section; left out: none"""
    output: Output = Output()
    """what is kept of the seismograms"""

    _text: str = PrivateAttr("")
    _folder: Path = PrivateAttr(Path())

    @classmethod
    def load(cls, path: str | Path) -> "Scenario":
        """The scenario in a TOML file; InputError with every mistake in it, one a line."""
        from .reading import load

        return load(path)

    @classmethod
    def from_text(cls, text: str, where: str = "scenario") -> "Scenario":
        """The scenario in a TOML text; `where` stands for the file's name in messages."""
        from .reading import from_text

        return from_text(text, where)

    def resolved_text(self) -> str:
        """TOML with every default spelled out; it reads back as an equal scenario."""
        from .writing import resolved_text

        return resolved_text(self)

    @property
    def text(self) -> str:
        """The TOML as it was given; empty for a scenario made in Python."""
        return self._text

    @property
    def folder(self) -> Path:
        """The folder from which the scenario's file names are seen."""
        return self._folder

    def find_problems(self) -> Iterator[Problem]:
        yield from checks.scenario_problems(self)

    def __eq__(self, other: object) -> bool:
        """Two scenarios are equal if they ask the same, however that was written down."""
        return isinstance(other, Scenario) and all(getattr(self, key) == getattr(other, key) for key in Scenario.model_fields)
