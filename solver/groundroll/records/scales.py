"""netCDF-4 habits on top of h5py: axes are dimension scales, every array names its axes, units and meaning."""

import h5py
import numpy as np

from groundroll.records.layout import AXES, Quantity


def describe(dataset: h5py.Dataset, quantity: Quantity) -> None:
    """Write `units` and `long_name` on a dataset."""
    dataset.attrs["units"] = quantity.units
    dataset.attrs["long_name"] = quantity.long_name


def add_axis(group: h5py.Group, name: str, values: np.ndarray | None = None) -> h5py.Dataset:
    """Create the axis `name` of the table AXES as a dimension scale; without values it is empty and can grow."""
    if values is None:
        axis = group.create_dataset(name, shape=(0,), maxshape=(None,), chunks=(1024,), dtype="f8")
    else:
        axis = group.create_dataset(name, data=values)
    axis.make_scale(name)
    describe(axis, AXES[name])
    return axis


def add_array(
    group: h5py.Group,
    name: str,
    axes: tuple[str, ...],
    quantity: Quantity,
    *,
    values: np.ndarray | None = None,
    coordinates: str = "",
    **storage,
) -> h5py.Dataset:
    """Create an array over axes that stand in the same group, from values or from h5py storage arguments.

    coordinates: names, parted by blanks, of arrays in the group that say where the values stand.
    """
    array = group.create_dataset(name, data=values, **storage)
    for number, axis in enumerate(axes):
        array.dims[number].attach_scale(group[axis])
    describe(array, quantity)
    if coordinates:
        array.attrs["coordinates"] = coordinates
    return array
