"""The ground: layers and terrain."""

from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import Field

from .bodies import AnyBody, RandomGround
from .material import Density, FillMissing, PSpeed, Quality, SSpeed, WaterSpeed, fast_s, incomplete, slow_p
from .parts import Along, DepthFrom, FileName, Frequency, Length, Part, Position, Problem, Row, Within, above_ground, rising

Elevation = Annotated[tuple[float, float], Row(("x", "elevation"), "m")]


class Layer(Part):
    """A layer of ground, uniform or with values that change linearly from its top to its bottom."""

    thickness: Length | None = Field(None, examples=[8.0])
    """thickness of the layer; left out: down to the top_line of the next layer; the last layer goes on down"""
    vp: PSpeed | None = Field(None, examples=[400.0])
    """speed of P waves; left out: by the relation in [ground.fill_missing]"""
    vs: SSpeed | None = Field(None, examples=[150.0])
    """speed of S waves; left out: by the relation in [ground.fill_missing]"""
    density: Density | None = Field(None, examples=[1800.0])
    """mass density; left out: by the relation in [ground.fill_missing]"""
    qp: Quality | None = Field(None, examples=[40.0])
    """quality factor of P waves; left out: elastic"""
    qs: Quality | None = Field(None, examples=[20.0])
    """quality factor of S waves; left out: elastic"""
    vp_bottom: PSpeed | None = Field(None, examples=[500.0])
    """speed of P waves at the bottom of the layer, linear between; left out: as at the top"""
    vs_bottom: SSpeed | None = Field(None, examples=[200.0])
    """speed of S waves at the bottom of the layer, linear between; left out: as at the top"""
    density_bottom: Density | None = Field(None, examples=[1900.0])
    """density at the bottom of the layer, linear between; left out: as at the top"""
    top_line: tuple[Position, ...] | None = Field(None, examples=[[[0.0, 6.0], [240.0, 9.0]]])
    """the layer's top along x, for one that dips or bends, level beyond its ends; left out: below the layer above"""
    top_smooth: bool = False
    """whether top_line is a smooth curve through its points, not straight pieces"""

    def find_problems(self) -> Iterator[Problem]:
        yield from slow_p(self.vp, self.vs, "vp")
        for key in ("vp_bottom", "vs_bottom", "density_bottom"):
            if getattr(self, key) is not None and self.thickness is None:
                yield Problem(
                    "a layer without thickness has no bottom of its own",
                    "only in a layer that has a thickness",
                    "remove {key}",
                    (key,),
                )
        yield from self._slow_bottom()
        yield from self._top_problems()

    def _top_problems(self) -> Iterator[Problem]:
        if self.top_line is not None:
            yield from rising(self.top_line, "top_line")
        elif self.top_smooth:
            yield Problem("there is no line to smooth", "only in a layer that has a top_line", "remove {key}", ("top_smooth",))

    def _slow_bottom(self) -> Iterator[Problem]:
        if self.vp_bottom is None and self.vs_bottom is None:
            return
        vp = self.vp_bottom if self.vp_bottom is not None else self.vp
        vs = self.vs_bottom if self.vs_bottom is not None else self.vs
        if self.vp_bottom is not None:
            yield from slow_p(vp, vs, "vp_bottom")
        else:
            yield from fast_s(vp, vs, "vs_bottom")


class Terrain(Part):
    """The ground surface: elevation, positive up, about the datum 0; exactly one of points, file, shape."""

    points: tuple[Elevation, ...] | None = Field(None, examples=[[[0.0, 0.0], [120.0, 6.0], [240.0, 0.0]]])
    """the surface by points, x increasing; left out: file or shape"""
    file: FileName | None = Field(None, examples=["terrain.csv"])
    """the surface by columns x and elevation (m); left out: points or shape"""
    shape: Literal["hill", "valley"] | None = Field(None, examples=["hill"])
    """a cosine bell up or down: height/2 (1 + cos(pi (x - centre) / half_width)); left out: points or file"""
    centre: Annotated[float, Within("m", at_least=-1e6, at_most=1e6)] | None = Field(None, examples=[120.0])
    """x of the top of a hill or of the floor of a valley; left out: no shape"""
    height: Length | None = Field(None, examples=[6.0])
    """height of a hill, depth of a valley; left out: no shape"""
    half_width: Length | None = Field(None, examples=[60.0])
    """distance from the centre to the foot of the bell; left out: no shape"""

    def find_problems(self) -> Iterator[Problem]:
        given = [key for key in ("points", "file", "shape") if getattr(self, key) is not None]
        if len(given) != 1:
            fix = f"remove {' and '.join(given[1:])}" if given else "add points = [[0.0, 0.0], [240.0, 6.0]]"
            yield Problem("terrain is given in exactly one way", "exactly one of points, file, shape", fix)
            return
        yield from self._shape_problems()
        if self.points is not None:
            yield from rising(self.points, "points")

    def _shape_problems(self) -> Iterator[Problem]:
        for key in ("centre", "height", "half_width"):
            if self.shape and getattr(self, key) is None:
                yield Problem(f'missing: shape = "{self.shape}" needs it', path=(key,))
            if not self.shape and getattr(self, key) is not None:
                yield Problem("used only by a shape", 'only with shape = "hill" or "valley"', "remove {key}", (key,))

    def highest(self) -> float | None:
        """The greatest elevation as far as the scenario itself tells (m); None where a file does."""
        if self.points is not None:
            return max(elevation for _, elevation in self.points)
        return None if self.file is not None else (self.height if self.shape == "hill" else 0.0)


class Ground(Part):
    """What the section is made of."""

    reference_frequency: Frequency | None = Field(None, examples=[10.0])
    """frequency at which vp and vs are the phase speeds where qp, qs are given; left out: the middle of the band"""
    depth_from: DepthFrom = "surface"
    """whether the layers follow the terrain or lie level below the datum"""
    layers: tuple[Layer, ...] = Field((), alias="layer")
    """the layers from the top, the last one going on down; left out: profile or grid"""
    profile: FileName | None = Field(None, examples=["profile.csv"])
    """columns depth, vp, vs, density, qp, qs; left out: layers or grid"""
    grid: FileName | None = Field(None, examples=["section.h5"])
    """properties on a grid of x and depth (HDF5 or CSV); left out: layers or profile"""
    bodies: tuple[AnyBody, ...] = Field((), alias="body")
    """pieces of other ground, or voids, laid over the layers in turn"""
    random: RandomGround | None = None
    """random change of the speeds; left out: none"""
    water_table: Along | None = Field(None, examples=[4.0])
    """depth of the water table; left out: none"""
    water_vp: WaterSpeed | None = Field(None, examples=[1500.0])
    """least vp below the water table; left out: vp stays as given"""
    fill_missing: FillMissing | None = None
    """published relations for what is left out; left out: everything is given"""
    terrain: Terrain | None = None
    """the ground surface; left out: flat, at the datum"""

    def find_problems(self) -> Iterator[Problem]:
        yield from self._one_way()
        yield from self._thickness_problems()
        for index, layer in enumerate(self.layers):
            yield from incomplete(layer, self.fill_missing, ("layer", index))
        for index, body in enumerate(self.bodies):
            if not body.void:
                yield from incomplete(body, self.fill_missing, ("body", index))
        if self.water_vp is not None and self.water_table is None:
            yield Problem("there is no water table", "only with a water_table", "add water_table = 4.0", ("water_vp",))

    def _one_way(self) -> Iterator[Problem]:
        given = [key for key, value in (("layer", self.layers), ("profile", self.profile), ("grid", self.grid)) if value]
        if len(given) != 1:
            yield Problem(
                "the ground is given in exactly one way",
                "exactly one of [[ground.layer]], profile, grid",
                f"remove {' and '.join(given[1:])}" if given else "add [[ground.layer]]",
            )

    def _thickness_problems(self) -> Iterator[Problem]:
        for index, layer in enumerate(self.layers):
            below = self.layers[index + 1] if index + 1 < len(self.layers) else None
            path = ("layer", index, "thickness")
            if below is None and layer.thickness is not None:
                yield Problem(
                    "the last layer has a bottom, and nothing lies below it",
                    "no thickness in the last layer",
                    "remove {key}",
                    path,
                )
            elif below is not None and below.top_line is None and layer.thickness is None:
                yield Problem("missing: only the last layer goes on down", path=path)
            elif below is not None and below.top_line is not None and layer.thickness is not None:
                yield Problem(
                    "the top_line of the next layer is its bottom already",
                    "thickness or top_line",
                    "remove {key}",
                    path,
                )
            if layer.top_line is not None:
                yield from self._top_problems(index, layer.top_line)

    def _top_problems(self, index: int, line: tuple[tuple[float, float], ...]) -> Iterator[Problem]:
        if index == 0:
            yield Problem(
                "the top of the first layer is the ground surface",
                "top_line from the second layer on",
                "remove {key}",
                ("layer", 0, "top_line"),
            )
        for item, (_, depth) in enumerate(line):
            if depth < 0.0 and self.depth_from == "surface":
                yield above_ground(("layer", index, "top_line", item), depth)
