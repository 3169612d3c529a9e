"""Gridded sections from files."""

from dataclasses import dataclass
from pathlib import Path

import h5py
import numpy as np

from groundroll.errors import InputError
from groundroll.scenario.literal import plain

from .csv_files import read_columns
from .fill import Filling
from .material_columns import as_material, check_bulk, material_columns
from .tables import Column, Table, refuse


@dataclass(frozen=True)
class GridTable:
    """A grid: `x` (nx,), `depth` (nz,), increasing (m); `material` of arrays (nz, nx), qp and qs inf where elastic."""

    x: np.ndarray
    depth: np.ndarray
    material: dict[str, np.ndarray]


def read_grid_csv(path: Path, filling: Filling) -> GridTable:
    """A grid as lines of x, depth, vp, vs, density, qp, qs, in any order, each point of the grid once."""
    table = read_columns(path, (Column("x"), Column("depth"), *material_columns(filling)), rows_needed=1)
    material = as_material(table.values, filling, f"{path}: ")
    check_bulk(table, material)
    x, column = np.unique(table["x"], return_inverse=True)
    depth, row = np.unique(table["depth"], return_inverse=True)
    at = row * len(x) + column
    _check_whole(path, table, at, x, depth)
    order = np.argsort(at)
    return GridTable(x, depth, {name: values[order].reshape(len(depth), len(x)) for name, values in material.items()})


def _check_whole(path: Path, table: Table, at: np.ndarray, x: np.ndarray, depth: np.ndarray) -> None:
    """InputError unless every x comes with every depth once."""
    seen = np.bincount(at, minlength=len(x) * len(depth))
    order = np.argsort(at, kind="stable")
    for again in order[1:][np.diff(at[order]) == 0][:1]:
        fix = "remove one of the two lines"
        table.refuse(again, "depth", f"x = {plain(float(table['x'][again]))} m has this depth twice", "each point once", fix)
    for missing in np.flatnonzero(seen == 0)[:1]:
        there = f"x = {plain(float(x[missing % len(x)]))} m, depth = {plain(float(depth[missing // len(x)]))} m"
        received = f"{len(at)} points for {len(x)} x and {len(depth)} depths"
        refuse(str(path), "grid", f"no line at {there}", received, "every x with every depth", "add that line")


def read_grid_hdf5(path: Path, filling: Filling) -> GridTable:
    """A grid as HDF5 datasets x (nx,), depth (nz,) and vp, vs, density, qp, qs (depth, x)."""
    arrays = _datasets(path, ("x", "depth", *(column.name for column in material_columns(filling))))
    for name in ("x", "depth"):
        _check_axis(path, name, arrays.get(name))
    shape = (len(arrays["depth"]), len(arrays["x"]))
    for column in material_columns(filling):
        _check_array(path, column, arrays.get(column.name), shape)
    values = {name: arrays[name] for name in arrays if name not in ("x", "depth")}
    material = as_material(values, filling, f"{path}: ")
    check_bulk(_flat_table(path, material), {name: array.ravel() for name, array in material.items()})
    return GridTable(arrays["x"], arrays["depth"], material)


def _datasets(path: Path, names: tuple[str, ...]) -> dict[str, np.ndarray]:
    """The datasets of these names at the root of the file, as float64."""
    example = f"an HDF5 file with datasets {', '.join(names)}"
    if not path.is_file():
        raise InputError(f"{path}: no such file; allowed {example}; correct its name in the scenario")
    try:
        with h5py.File(path, "r") as file:
            there = {name: file[name] for name in names if isinstance(file.get(name), h5py.Dataset)}
            for name, dataset in there.items():
                if dataset.dtype.kind not in "fiu":
                    refuse(str(path), name, "not numbers", str(dataset.dtype), "an array of numbers", "write it as float64")
            return {name: np.asarray(dataset[()], dtype=float) for name, dataset in there.items()}
    except OSError:
        raise InputError(f"{path}: not an HDF5 file that can be read; allowed {example}; save it as HDF5 or netCDF-4") from None


def _check_axis(path: Path, name: str, axis: np.ndarray | None) -> None:
    allowed = "one or more increasing numbers in m"
    if axis is None:
        refuse(str(path), name, "missing", "nothing", allowed, f"add a dataset {name}")
    if axis.ndim != 1 or not axis.size:
        fix = f"write {name} as a one-dimensional dataset"
        refuse(str(path), name, "not a row of numbers", f"shape {axis.shape}", allowed, fix)
    if not np.isfinite(axis).all():
        refuse(str(path), name, "not finite everywhere", "nan or inf", allowed, "correct it")
    for item in np.flatnonzero(np.diff(axis) <= 0.0)[:1]:
        received = f"{plain(float(axis[item + 1]))} after {plain(float(axis[item]))}"
        refuse(f"{path} at [{item + 1}]", name, f"{name} does not increase", received, allowed, f"sort the grid by {name}")


def _check_array(path: Path, column: Column, array: np.ndarray | None, shape: tuple[int, int]) -> None:
    name, allowed = column.name, f"shape {shape}, (depth, x)"
    if array is None:
        if not column.optional:
            refuse(str(path), name, "missing", "nothing", allowed, f"add a dataset {name}")
        return
    if array.shape != shape:
        fix = "transpose it" if array.shape == shape[::-1] else "write one value per point of the grid"
        refuse(str(path), name, "not the shape of the grid", f"shape {array.shape}", allowed, fix)
    if not np.isfinite(array).all():
        row, item = np.argwhere(~np.isfinite(array))[0]
        refuse(f"{path} at [{row}, {item}]", name, "not a finite number", str(array[row, item]), "numbers in SI", "fill it in")
    _flat_table(path, {name: array}).must_lie_within(column)


def _flat_table(path: Path, arrays: dict[str, np.ndarray]) -> Table:
    """The arrays as a table whose rows are told by their indices."""
    width = next(iter(arrays.values())).shape[1]
    values = {name: array.ravel() for name, array in arrays.items()}
    return Table(values, lambda row: f"{path} at [{row // width}, {row % width}]")
