"""Reading records back: everything small at once, snapshots frame by frame, no file left open."""

import json
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

import h5py
import numpy as np

from groundroll.errors import InputError, StorageError
from groundroll.records import layout
from groundroll.records.layout import PARTIAL, RECORDS


class _Named:
    """Lets the arrays in `self.arrays` be reached as attributes too."""

    def __getattr__(self, name: str):
        arrays = self.__dict__.get("arrays", {})
        if name in arrays:
            return arrays[name]
        raise AttributeError(f"no {name!r} here; recorded: {', '.join(arrays) or 'nothing'}")


@dataclass(frozen=True)
class Seismograms(_Named):
    """One receiver line: time (time,) in s; x, depth, elevation (receiver,) in m; arrays by name (receiver, time).

    Each quantity is an attribute as well: `line.velocity_z`, m/s, positive downward.
    """

    name: str
    time: np.ndarray
    x: np.ndarray
    depth: np.ndarray
    elevation: np.ndarray
    arrays: dict[str, np.ndarray]


@dataclass(frozen=True)
class Ledger(_Named):
    """Totals over time: time (time,) in s, arrays by name (time,), with their units and long names."""

    time: np.ndarray
    arrays: dict[str, np.ndarray]
    units: dict[str, str]
    long_names: dict[str, str]


@dataclass(frozen=True)
class Ground(_Named):
    """Properties on the nodes, by name (z, x); x (nx,), z (nz,) in m; elevation (nz, nx) or None on a flat mesh."""

    x: np.ndarray
    z: np.ndarray
    elevation: np.ndarray | None
    arrays: dict[str, np.ndarray]
    units: dict[str, str]
    long_names: dict[str, str]


class _Source:
    """Where the HDF5 data lie: a path, opened for each look, or a file in memory that stays open."""

    def __init__(self, place: Path | h5py.File):
        self._place = place

    @contextmanager
    def look(self) -> Iterator[h5py.File]:
        if isinstance(self._place, h5py.File):
            yield self._place
            return
        with h5py.File(self._place, "r", locking=False) as hdf:
            yield hdf


@dataclass(frozen=True)
class Snapshots:
    """Stored instants: time (frame,) in s, x (nx,), z (nz,) in m, elevation (nz, nx) or None on a flat mesh."""

    fields: tuple[str, ...]
    time: np.ndarray
    x: np.ndarray
    z: np.ndarray
    elevation: np.ndarray | None
    _source: _Source

    def __len__(self) -> int:
        return len(self.time)

    def frame(self, field: str, index: int) -> np.ndarray:
        """One instant of a field as an array (z, x), read now; index may count from the end."""
        if field not in self.fields:
            raise InputError(f"no snapshots of {field!r}; stored: {', '.join(self.fields)}")
        number = range(len(self))[index]
        with _readable("the snapshots"), self._source.look() as hdf:
            return hdf[layout.SNAPSHOTS][field][number]


@dataclass(frozen=True)
class Records:
    """All that a run left: seismograms by receivers name, snapshots and ground (or None), ledger, scene, provenance.

    complete is True only if the run ended well. path is None for records in memory.
    """

    path: Path | None
    complete: bool
    seismograms: dict[str, Seismograms]
    snapshots: Snapshots | None
    ledger: Ledger
    ground: Ground | None
    scene: dict
    texts: dict[str, str]
    provenance: dict


def open_records(folder_or_file: str | Path) -> Records:
    """Read the records of a run from its folder, or from a file.

    In a folder, records.h5 is read; if there is none, records.h5.partial, as incomplete (a run that goes on or
    was killed). Raises StorageError if there is neither or the file cannot be read.
    """
    path = Path(folder_or_file)
    if path.is_dir():
        found = [path / name for name in (RECORDS, PARTIAL) if (path / name).is_file()]
        if not found:
            raise StorageError(f"no records in {path}: it holds neither {RECORDS} nor {PARTIAL}")
        path = found[0]
    elif not path.is_file():
        raise StorageError(f"no records at {path}: there is no such file or folder")
    return read_records(path)


def read_records(place: Path | h5py.File) -> Records:
    """Read records from a path or from a file in memory."""
    source = _Source(place)
    path = place if isinstance(place, Path) else None
    with _readable(str(path or "records in memory")), source.look() as hdf:
        provenance = {name: _value(value) for name, value in hdf[layout.PROVENANCE].attrs.items()}
        texts = {name: data.asstr()[()] for name, data in hdf[layout.TEXTS].items()}
        return Records(
            path=path,
            complete=provenance["complete"] == 1 and (path is None or path.suffix != ".partial"),
            seismograms={name: _seismograms(name, group) for name, group in hdf[layout.SEISMOGRAMS].items()},
            snapshots=_snapshots(hdf[layout.SNAPSHOTS], source) if layout.SNAPSHOTS in hdf else None,
            ledger=_ledger(hdf[layout.LEDGER]),
            ground=_ground(hdf[layout.GROUND]) if layout.GROUND in hdf else None,
            scene=json.loads(texts.pop(layout.SCENE, "{}")),
            texts=texts,
            provenance=provenance,
        )


@contextmanager
def _readable(what: str):
    try:
        yield
    except (OSError, RuntimeError, KeyError) as error:
        raise StorageError(f"{what} cannot be read as records: {error}") from error


def _value(value):
    return value.item() if isinstance(value, np.generic) else value


def _seismograms(name: str, group: h5py.Group) -> Seismograms:
    known = {axis: group[axis][()] for axis in ("x", "depth", "elevation")}
    names = [key for key in group if key not in {*known, "time", "receiver"}]
    time, arrays = _over_time(group, names)
    return Seismograms(name=name, time=time, arrays=arrays, **known)


def _over_time(group: h5py.Group, names: list[str]) -> tuple[np.ndarray, dict[str, np.ndarray]]:
    """time and arrays (…, time), cut to the samples that all have: a kill may have parted one from another."""
    length = min([group["time"].shape[0], *(group[name].shape[-1] for name in names)])
    return group["time"][:length], {name: group[name][..., :length] for name in names}


def _nodes(group: h5py.Group) -> dict[str, np.ndarray | None]:
    elevation = group["elevation"][()] if "elevation" in group else None
    return {"x": group["x"][()], "z": group["z"][()], "elevation": elevation}


def _snapshots(group: h5py.Group, source: _Source) -> Snapshots:
    fields = tuple(key for key in group if key not in {"x", "z", "elevation", "time"})
    count = min([group["time"].shape[0], *(group[field].shape[0] for field in fields)])
    return Snapshots(fields=fields, time=group["time"][:count], _source=source, **_nodes(group))


def _labels(group: h5py.Group, names) -> dict[str, dict[str, str]]:
    return {
        "units": {name: group[name].attrs["units"] for name in names},
        "long_names": {name: group[name].attrs["long_name"] for name in names},
    }


def _ledger(group: h5py.Group) -> Ledger:
    names = [key for key in group if key != "time"]
    time, arrays = _over_time(group, names)
    return Ledger(time=time, arrays=arrays, **_labels(group, names))


def _ground(group: h5py.Group) -> Ground:
    names = [key for key in group if key not in {"x", "z", "elevation"}]
    return Ground(arrays={name: group[name][()] for name in names}, **_nodes(group), **_labels(group, names))
