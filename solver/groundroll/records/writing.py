"""Writing the records of one run, on disk or in memory, so that what was put is there even if the run dies."""

import json
import math
from contextlib import contextmanager
from pathlib import Path

import numpy as np

from groundroll.errors import InputError, StorageError
from groundroll.records import layout
from groundroll.records.layout import AXES, QUANTITIES, Quantity, ReceiverLine, SnapshotFrame
from groundroll.records.reading import Records, read_records
from groundroll.records.scales import add_array, add_axis, describe
from groundroll.records.storage import DiskFile, MemoryFile, plain_errors


class RecordsWriter:
    """Context manager that writes `records.h5` in a folder (or in memory: folder None), flushed after every put.

    folder       where records.h5 goes; until finish() the file is records.h5.partial, marked incomplete
    lines        receiver lines, each with a name of its own
    snapshots    where snapshots stand and of what fields, or None
    provenance   attributes of /provenance (text, numbers, true/false; a None is left out)
    texts        whole texts to keep with the records, by name (the scenario as given, for one)

    Leaving the block without finish() finishes as incomplete; if nothing had been recorded, the partial file
    is removed and an earlier records.h5 stays.

    Raises StorageError if the disk is full, the folder cannot be written or another process writes there,
    InputError for an array whose shape does not fit what was announced.
    """

    def __init__(
        self,
        folder: str | Path | None,
        lines: list[ReceiverLine],
        snapshots: SnapshotFrame | None,
        provenance: dict,
        texts: dict[str, str],
    ):
        _check_names([line.name for line in lines])
        _check_quantities(() if snapshots is None else snapshots.fields)
        self._lines = {line.name: line for line in lines}
        self._frame = snapshots
        self._recorded = False
        self._finished = False
        self._file = MemoryFile() if folder is None else DiskFile(Path(folder))
        try:
            size = sum(len(text.encode()) for text in texts.values()) + sum(40 * len(line.x) for line in lines)
            if snapshots is not None:
                size += 8 * len(snapshots.x) * len(snapshots.z)
            with self._putting("starting the records", size):
                self._start(provenance, texts)
        except BaseException:
            self._file.let_go(remove=True)
            raise

    def __enter__(self):
        return self

    def __exit__(self, kind, error, trace):
        if self._finished:
            return
        if isinstance(error, StorageError) or not self._recorded:
            self._finished = True
            self._file.let_go(remove=not self._recorded)
        else:
            self.finish(complete=False)

    def put_seismograms(self, line_name: str, time: np.ndarray, quantities: dict[str, np.ndarray]) -> None:
        """Store the whole record so far of one line: time (time,) in s, each quantity (receiver, time)."""
        _check_quantities(quantities)
        shape = (len(self._lines[line_name].x), len(time))
        with self._putting("writing the seismograms", len(quantities) * _room(shape) + _room((len(time),))):
            group = self._file.hdf[layout.SEISMOGRAMS][line_name]
            for name, values in quantities.items():
                _check_shape(name, values, shape)
                _replace(group, name, ("receiver", "time"), QUANTITIES[name], values, coordinates="x depth elevation")
            _resize(group["time"], time)
        self._recorded = True

    def add_snapshot(self, time: float, fields: dict[str, np.ndarray]) -> None:
        """Append one instant (s): every announced field as an array (z, x), kept in single precision."""
        if self._frame is None or set(fields) != set(self._frame.fields):
            raise InputError(f"snapshots of {sorted(fields)} were not announced")
        shape = (len(self._frame.z), len(self._frame.x))
        with self._putting("writing a snapshot", len(fields) * 4 * math.prod(shape)):
            group = self._file.hdf[layout.SNAPSHOTS]
            count = group["time"].shape[0]
            for name, values in fields.items():
                _check_shape(name, values, shape)
                group[name].resize(count + 1, axis=0)
                group[name][count] = values
            group["time"].resize((count + 1,))
            group["time"][count] = time
        self._recorded = True

    def put_ledger(self, time: np.ndarray, totals: dict[str, tuple[np.ndarray, str, str]]) -> None:
        """Store the totals so far: time (time,) in s and, by name, (values (time,), units, long_name)."""
        with self._putting("writing the ledger", (len(totals) + 1) * _room((len(time),))):
            group = self._file.hdf[layout.LEDGER]
            for name, (values, units, long_name) in totals.items():
                _check_shape(name, values, (len(time),))
                _replace(group, name, ("time",), Quantity(units, long_name), values)
            _resize(group["time"], time)

    def put_ground(
        self,
        properties: dict[str, tuple[np.ndarray, str, str]],
        x: np.ndarray,
        z: np.ndarray,
        elevation: np.ndarray | None = None,
    ) -> None:
        """Store, once, the ground as the solver sees it: by name (values (z, x), units, long_name) on the nodes.

        x (nx,), z (nz,) in m; elevation (nz, nx) of the nodes, positive up, where the mesh follows a terrain.
        """
        with self._putting("writing the ground", (4 * len(properties) + 8) * len(z) * len(x)):
            group = self._file.hdf.create_group(layout.GROUND, track_order=True)
            _add_nodes(group, x, z, elevation)
            for name, (values, units, long_name) in properties.items():
                _check_shape(name, values, (len(z), len(x)))
                add_array(
                    group, name, ("z", "x"), Quantity(units, long_name), values=np.asarray(values, "f4"),
                    coordinates="" if elevation is None else "elevation",
                    chunks=True, compression="gzip", compression_opts=1, shuffle=True,
                )  # fmt: skip

    def put_scene(
        self,
        *,
        title: str,
        sources: list[dict] = (),
        interfaces: list[dict] = (),
        guides: list[dict] = (),
        surface: dict | None = None,
    ) -> None:
        """Store what pictures need beside the arrays; here `depth` is below the datum (= -elevation), in m.

        sources     {"name", "kind", "x", "depth"}, the first one is where distances are counted from
        interfaces  {"x": [...], "depth": [...]}: polylines
        guides      {"wave": "P" | "S" | "Rayleigh", "speed": m/s, "x0": m, "t0": s}: direct waves
        surface     {"x": [...], "depth": [...]} where the ground is not flat
        """
        scene = {
            "title": title,
            "sources": list(sources),
            "interfaces": list(interfaces),
            "guides": list(guides),
            "surface": surface,
        }
        text = json.dumps(scene, allow_nan=False, default=_plain)
        with self._putting("writing the scene", len(text)):
            self._put_text(layout.SCENE, text)

    def flush(self) -> None:
        """Hand all that was put to the system; a process that is killed afterwards loses none of it."""
        with self._putting("writing the records"):
            pass

    def finish(self, complete: bool, **provenance_updates) -> None:
        """Put the file in its place as records.h5, marked complete (1) or not (0), with last words on provenance."""
        with self._putting("finishing the records"):
            self._put_provenance(provenance_updates)
        with self._putting("finishing the records"):  # the mark goes in only after all else is down
            self._file.hdf[layout.PROVENANCE].attrs["complete"] = int(complete)
        with plain_errors("finishing the records", self._file.folder):
            self._file.settle()
        self._finished = True

    def records(self) -> Records:
        """What was written, after finish(); those in memory stay open as long as somebody holds them."""
        if not self._finished:
            raise StorageError("the records are still being written")
        if self._file.folder is None:
            return read_records(self._file.hdf)
        return read_records(self._file.folder / layout.RECORDS)

    @contextmanager
    def _putting(self, doing: str, size: int = 0):
        """One put of `size` bytes: room first, a flush at its end, and plain words for whatever storage throws."""
        with plain_errors(doing, self._file.folder):
            if self._finished:
                raise StorageError("these records are finished; nothing more can be written")
            self._file.reserve(size)
            yield
            self._file.hdf.flush()

    def _start(self, provenance: dict, texts: dict[str, str]) -> None:
        hdf = self._file.hdf
        hdf.create_group(layout.PROVENANCE, track_order=True)
        self._put_provenance(provenance | {"complete": 0})
        seismograms = hdf.create_group(layout.SEISMOGRAMS, track_order=True)
        for line in self._lines.values():
            _add_line(seismograms.create_group(line.name, track_order=True), line)
        if self._frame is not None:
            _add_frame(hdf.create_group(layout.SNAPSHOTS, track_order=True), self._frame)
        add_axis(hdf.create_group(layout.LEDGER, track_order=True), "time")
        hdf.create_group(layout.TEXTS, track_order=True)
        for name, text in texts.items():
            self._put_text(name, text)

    def _put_provenance(self, entries: dict) -> None:
        attributes = self._file.hdf[layout.PROVENANCE].attrs
        for name, value in entries.items():
            if value is not None:
                attributes[name] = int(value) if isinstance(value, bool) else value

    def _put_text(self, name: str, text: str) -> None:
        # a dataset, since an attribute ends at 64 kB
        describe(self._file.hdf[layout.TEXTS].create_dataset(name, data=text), Quantity("1", f"text: {name}"))


def _plain(value):
    """numpy numbers and arrays as JSON knows them."""
    return value.tolist()


def _check_names(names: list[str]) -> None:
    for name in names:
        if not name or "/" in name or name == ".":
            raise InputError(f"receivers cannot be stored under the name {name!r}: it is empty or has a slash")
        if names.count(name) > 1:
            raise InputError(f"two sets of receivers have the name {name!r}; give each its own")


def _check_quantities(names) -> None:
    for name in names:
        if name not in QUANTITIES:
            raise InputError(f"no quantity is called {name!r}; known: {', '.join(QUANTITIES)}")


def _check_shape(name: str, values: np.ndarray, shape: tuple[int, ...]) -> None:
    if np.shape(values) != shape:
        raise InputError(f"{name} has the shape {np.shape(values)}, not {shape}")


def _add_line(group, line: ReceiverLine) -> None:
    add_axis(group, "time")
    add_axis(group, "receiver", np.arange(len(line.x)))
    for name in ("x", "depth", "elevation"):
        values = np.asarray(getattr(line, name), "f8")
        _check_shape(f"{name} of the receivers {line.name!r}", values, (len(line.x),))
        add_array(group, name, ("receiver",), AXES[name], values=values)


def _add_nodes(group, x, z, elevation) -> None:
    add_axis(group, "z", np.asarray(z, "f8"))
    add_axis(group, "x", np.asarray(x, "f8"))
    if elevation is not None:
        _check_shape("elevation of the nodes", elevation, (len(z), len(x)))
        add_array(group, "elevation", ("z", "x"), AXES["elevation"], values=np.asarray(elevation, "f8"))


def _add_frame(group, frame: SnapshotFrame) -> None:
    add_axis(group, "time")
    _add_nodes(group, frame.x, frame.z, frame.elevation)
    shape = (len(frame.z), len(frame.x))
    for name in frame.fields:
        add_array(
            group, name, ("time", "z", "x"), QUANTITIES[name],
            coordinates="" if frame.elevation is None else "elevation",
            shape=(0, *shape), maxshape=(None, *shape), chunks=(1, *shape), dtype="f4",
            compression="gzip", compression_opts=1, shuffle=True,
        )  # fmt: skip


def _replace(group, name: str, axes: tuple[str, ...], quantity: Quantity, values: np.ndarray, coordinates="") -> None:
    """Write an array whose last axis, time, grows from call to call; not packed, so that it is replaced in place."""
    values = np.asarray(values)
    if name not in group:
        fixed = values.shape[:-1]
        add_array(
            group, name, axes, quantity, coordinates=coordinates, dtype=values.dtype,
            shape=(*fixed, 0), maxshape=(*fixed, None), chunks=_chunk(values.shape),
        )  # fmt: skip
    _resize(group[name], values)


def _chunk(shape: tuple[int, ...]) -> tuple[int, ...]:
    return (*(min(max(n, 1), 16) for n in shape[:-1]), 1024)


def _room(shape: tuple[int, ...]) -> int:
    """Bytes on disk, at most, of an array that grows along its last axis: whole chunks, double precision."""
    return 8 * math.prod(-(-n // step) * step for n, step in zip(shape, _chunk(shape), strict=True))


def _resize(dataset, values: np.ndarray) -> None:
    dataset.resize(np.shape(values))
    dataset[...] = values
