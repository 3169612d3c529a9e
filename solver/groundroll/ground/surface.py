"""The terrain of a scenario as a smooth surface."""

import numpy as np

from groundroll.scenario import Scenario

from .csv_files import read_columns
from .tables import Column
from .terrain import Surface, bell, flat, through_points

COLUMNS = (Column("x"), Column("elevation"))


def surface_of(scenario: Scenario, radius: float) -> Surface:
    """The ground surface, kinks rounded over `radius` (m). InputError for a bad terrain file."""
    terrain, length = scenario.ground.terrain, scenario.section.length
    if terrain is None:
        return flat()
    if terrain.shape is not None:
        height = terrain.height if terrain.shape == "hill" else -terrain.height
        return bell(terrain.centre, height, terrain.half_width, length, radius)
    if terrain.points is not None:
        x, elevation = zip(*terrain.points, strict=True)
    else:
        table = read_columns(scenario.folder / terrain.file, COLUMNS, rows_needed=2)
        table.must_rise("x")
        for row in np.flatnonzero(table["elevation"] <= -scenario.section.depth)[:1]:
            what = "the ground surface would lie below the section"
            allowed = f"above -{scenario.section.depth:g} m (section.depth)"
            table.refuse(int(row), "elevation", what, allowed, "make section.depth greater")
        x, elevation = table["x"], table["elevation"]
    return through_points(np.asarray(x, dtype=float), np.asarray(elevation, dtype=float), length, radius)
