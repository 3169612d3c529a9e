"""Ground given on a grid of x and depth, bilinear between its points, level beyond its ends."""

import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from .bilinear import between
from .columns import MATERIAL, QUALITY, Columns
from .fill import Filling
from .grid_files import GridTable, read_grid_csv, read_grid_hdf5


@dataclass(frozen=True)
class Grid:
    """Sheets of ground that begin at `top` (n,), depth in m; values (n, nx) at `x` (nx,), quality by its inverse."""

    x: np.ndarray
    top: np.ndarray
    values: dict[str, np.ndarray]

    def columns(self, x: np.ndarray, reference: np.ndarray, surface: np.ndarray) -> Columns:
        """The ground at `x` (m,) below z = `reference` (m,)."""
        top = reference[:, None] + self.top
        top[:, 0] = -np.inf
        material = {name: between(values.T, self.x, x) for name, values in self.values.items()}
        return Columns(surface, top, **{name: _inverted(name, values) for name, values in material.items()})


def _inverted(name: str, values: np.ndarray) -> np.ndarray:
    """Quality factor to its inverse and back, elastic being inf and 0."""
    if name not in QUALITY:
        return values
    return np.divide(1.0, values, out=np.full(values.shape, np.inf), where=values > 0.0)


def grid_of(path: Path, filling: Filling, thickest: float) -> Grid:
    """The grid of an HDF5 (or netCDF-4) or CSV file, cut into sheets no thicker than `thickest` (m).

    InputError with what is wrong in the file.
    """
    read = read_grid_hdf5 if path.suffix.lower() in (".h5", ".hdf5", ".nc", ".nc4") else read_grid_csv
    return _in_sheets(read(path, filling), thickest)


def _in_sheets(grid: GridTable, thickest: float) -> Grid:
    """Values in mid-sheet between the first and the last depth, and those of the first and last row beyond."""
    first, last = grid.depth[0], grid.depth[-1]
    count = math.ceil((last - first) / thickest - 1e-9)
    edges = first + (last - first) * np.arange(count + 1) / max(count, 1)
    middle = np.concatenate([[first], 0.5 * (edges[1:] + edges[:-1]), [last]])
    inverse = {name: 1.0 / values if name in QUALITY else values for name, values in grid.material.items()}
    values = {name: between(inverse[name], grid.depth, middle) for name in MATERIAL}
    return Grid(grid.x, np.concatenate([[first], edges]), values)
