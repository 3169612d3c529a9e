"""What a profile or a grid says of the material at its points, with the ranges that the scenario sets."""

from typing import get_args

import numpy as np

from groundroll.scenario.material import Density, PSpeed, Quality, SSpeed, slow_p
from groundroll.scenario.parts import Within

from .columns import MATERIAL, QUALITY
from .fill import Filling
from .tables import Column, Table, fix_of

QUANTITIES = {"vp": PSpeed, "vs": SSpeed, "density": Density, "qp": Quality, "qs": Quality}


def _range_of(annotated) -> Within:
    return next(mark for mark in get_args(annotated) if isinstance(mark, Within))


def material_columns(filling: Filling) -> tuple[Column, ...]:
    """vp, vs, density, qp, qs; those that may be left out are optional. vp is needed where both speeds could miss."""
    optional = {name: name in QUALITY or filling.gives(name) for name in QUANTITIES}
    if optional["vp"] and optional["vs"]:
        optional["vp"] = False
    return tuple(Column(name, _range_of(kind), optional[name]) for name, kind in QUANTITIES.items())


def as_material(values: dict[str, np.ndarray], filling: Filling, where: str) -> dict[str, np.ndarray]:
    """All five arrays of a material: relations fill in speeds and density, qp and qs left out are elastic (inf)."""
    arrays = {name: values.get(name) for name in MATERIAL}
    for name in QUALITY:
        if arrays[name] is None:
            arrays[name] = np.full(next(iter(values.values())).shape, np.inf)
    return filling.complete(arrays, where)


def check_bulk(table: Table, material: dict[str, np.ndarray]) -> None:
    """InputError, with the line, where the bulk modulus would not be positive."""
    vp, vs = material["vp"], material["vs"]
    for row in np.flatnonzero(3.0 * vp**2 <= 4.0 * vs**2)[:1]:
        problem = next(slow_p(float(vp[row]), float(vs[row]), "vp"))
        table.refuse(int(row), "vp", problem.what, problem.allowed, fix_of(problem.fix))
