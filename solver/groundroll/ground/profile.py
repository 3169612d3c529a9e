"""A profile from a CSV file: values at depths, linear between them; the same depth twice makes a jump."""

from functools import partial
from pathlib import Path

import numpy as np

from .columns import MATERIAL, QUALITY
from .csv_files import read_columns
from .fill import Filling
from .lines import Line
from .material_columns import as_material, check_bulk, material_columns
from .strata import Stratum
from .tables import Column, Table


def strata_of_profile(path: Path, filling: Filling) -> list[Stratum]:
    """The profile as strata: above its first depth as there, below its last as there.

    Columns depth (m), vp, vs (m/s), density (kg/m3), qp, qs; what relations give may be left out, and qp and qs
    (elastic). InputError with file and line for what is wrong in it.
    """
    table = read_columns(path, (Column("depth"), *material_columns(filling)), rows_needed=1)
    _check_depths(table)
    where = f"{path}: "
    check_bulk(table, as_material(table.values, filling, where))
    depth = [float(value) for value in table["depth"]]
    rows = [_values(table, row) for row in range(len(depth))]
    strata = [Stratum(0.0, None, rows[0], rows[0], where)]
    line: Line | None = partial(np.full_like, fill_value=depth[0])
    for row in range(len(rows) - 1):
        if depth[row + 1] > depth[row]:
            strata.append(Stratum(depth[row + 1] - depth[row], line, rows[row], rows[row + 1], where))
            line = None
    return [*strata, Stratum(np.inf, line, rows[-1], rows[-1], where)]


def _values(table: Table, row: int) -> dict[str, float | None]:
    values = {name: None if table.get(name) is None else float(table[name][row]) for name in MATERIAL}
    return {name: np.inf if value is None and name in QUALITY else value for name, value in values.items()}


def _check_depths(table: Table) -> None:
    depth = table["depth"]
    step = np.diff(depth)
    for row in np.flatnonzero(step < 0.0)[:1]:
        allowed = f"{depth[row]:g} m or more, the depth of the line before"
        table.refuse(row + 1, "depth", "depth decreases", allowed, "put the lines in order of depth")
    for row in np.flatnonzero((step[1:] == 0.0) & (step[:-1] == 0.0))[:1]:
        table.refuse(row + 2, "depth", "the third line of this depth", "a depth twice at most, for a jump", "remove one of them")
