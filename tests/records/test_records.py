"""Records are written safely, read back whole, and open as labelled data sets in a general array library."""

import json
import os
import subprocess
import sys
from pathlib import Path

import h5py
import numpy as np
import pytest
import xarray as xr

from groundroll.errors import InputError, StorageError
from groundroll.records import ReceiverLine, RecordsWriter, SnapshotFrame, open_records

COMPONENTS = ("velocity_x", "velocity_z")
LINE = ReceiverLine("street", np.array([80.0, 90.0, 100.0]), np.array([0.0, 0.0, 2.0]), np.array([3.0, 3.5, 2.0]))
ELEVATION = 3.0 - np.arange(4.0)[:, None] + 0.1 * np.arange(6.0)
FRAME = SnapshotFrame(COMPONENTS, np.arange(6.0), np.arange(4.0), ELEVATION)


def seismograms(samples: int, scale: float = 1.0) -> dict[str, np.ndarray]:
    rng = np.random.default_rng(7)
    whole = rng.standard_normal((2, 3, 5000)).astype("f4")
    return {name: scale * whole[k, :, :samples] for k, name in enumerate(COMPONENTS)}


def write(folder, *, samples=(40, 2500), scale=1.0, finish=True, frame=FRAME):
    with RecordsWriter(folder, [LINE], frame, {"version": "0.1", "threads": 1}, {"scenario": "é" * 50_000}) as writer:
        writer.put_scene(
            title="Levee", sources=[{"name": "hammer", "kind": "force", "x": np.float64(5.0), "depth": 0.0}],
            interfaces=[{"x": np.arange(9000.0), "depth": np.arange(9000.0)}],
        )  # fmt: skip
        writer.put_ground({"vs": (np.full((4, 6), 150.0), "m s-1", "S-wave speed")}, FRAME.x, FRAME.z, ELEVATION)
        for number, count in enumerate(samples):
            time = 0.001 * np.arange(count)
            writer.put_seismograms("street", time, seismograms(count, scale))
            writer.put_ledger(time, {"energy": (2.0 * time, "J m-1", "total energy")})
            if frame is not None:
                writer.add_snapshot(0.02 * number, {name: np.full((4, 6), number + 0.5) for name in COMPONENTS})
        if finish:
            writer.finish(complete=True, steps=np.int64(77))
            return writer.records()


@pytest.mark.parametrize("in_memory", [False, True])
def test_what_was_put_comes_back(tmp_path, in_memory):
    records = write(None if in_memory else tmp_path / "deep" / "run")
    line = records.seismograms["street"]
    assert records.complete
    np.testing.assert_array_equal(line.velocity_z, seismograms(2500)["velocity_z"])
    assert line.velocity_z.dtype == np.float32
    np.testing.assert_allclose(line.time, 0.001 * np.arange(2500), rtol=0, atol=1e-15)
    for axis in ("x", "depth", "elevation"):
        np.testing.assert_array_equal(getattr(line, axis), getattr(LINE, axis))
    assert len(records.snapshots) == 2
    np.testing.assert_array_equal(records.snapshots.frame("velocity_x", -1), np.full((4, 6), 1.5))
    np.testing.assert_array_equal(records.snapshots.elevation, ELEVATION)
    np.testing.assert_array_equal(records.ledger.energy, 2.0 * line.time)
    assert records.ledger.units["energy"] == "J m-1"
    np.testing.assert_array_equal(records.ground.vs, np.full((4, 6), 150.0))
    assert records.scene["sources"][0]["x"] == 5.0
    assert len(records.scene["interfaces"][0]["x"]) == 9000
    assert records.texts == {"scenario": "é" * 50_000}
    assert records.provenance == {"version": "0.1", "threads": 1, "steps": 77, "complete": 1}
    with pytest.raises(AttributeError, match="no 'displacement_x' here; recorded: velocity_x, velocity_z"):
        _ = line.displacement_x


def test_later_puts_replace_earlier_ones_also_by_fewer_samples():
    records = write(None, samples=(2500, 1030, 5))
    np.testing.assert_array_equal(records.seismograms["street"].velocity_x, seismograms(5)["velocity_x"])


@pytest.mark.parametrize(
    ("group", "array", "axes", "units", "placed"),
    [
        ("seismograms/street", "velocity_z", ("receiver", "time"), "m s-1", {"x", "depth", "elevation", "time"}),
        ("snapshots", "velocity_x", ("time", "z", "x"), "m s-1", {"time", "z", "x", "elevation"}),
        ("ledger", "energy", ("time",), "J m-1", {"time"}),
        ("ground", "vs", ("z", "x"), "m s-1", {"z", "x", "elevation"}),
    ],
)
def test_xarray_opens_each_group_with_axes_and_units(tmp_path, group, array, axes, units, placed):
    write(tmp_path)
    with xr.open_dataset(tmp_path / "records.h5", group=group, engine="h5netcdf") as data:
        assert data[array].dims == axes
        assert data[array].attrs["units"] == units
        assert placed <= set(data[array].coords)
        for name in data.variables:
            assert data[name].attrs["units"], name
            assert data[name].attrs["long_name"], name
    with xr.open_dataset(tmp_path / "records.h5", group="provenance", engine="h5netcdf") as data:
        assert data.attrs["complete"] == 1


def test_vertical_motion_says_that_it_is_positive_downward(tmp_path):
    write(tmp_path)
    with h5py.File(tmp_path / "records.h5") as hdf:
        assert "positive downward" in hdf["seismograms/street/velocity_z"].attrs["long_name"]


def test_snapshots_are_packed_one_instant_a_chunk(tmp_path):
    write(tmp_path)
    with h5py.File(tmp_path / "records.h5") as hdf:
        data = hdf["snapshots/velocity_x"]
        assert (data.chunks, data.compression, data.compression_opts, data.shuffle) == ((1, 4, 6), "gzip", 1, True)


VICTIM = """
import os, signal, sys
sys.path.insert(0, sys.argv[2])
from test_records import *
writer = RecordsWriter(sys.argv[1], [LINE], FRAME, {"version": "0.1"}, {})
for number in range(1, 40):
    time = 0.001 * np.arange(50 * number)
    writer.put_seismograms("street", time, seismograms(len(time)))
    writer.add_snapshot(0.02 * number, {name: np.full((4, 6), number + 0.5) for name in COMPONENTS})
os.kill(os.getpid(), signal.SIGKILL)
"""


def run_python(code: str, *arguments, **options) -> subprocess.CompletedProcess:
    command = [sys.executable, "-W", "error", "-c", code, *map(str, arguments)]
    return subprocess.run(command, capture_output=True, text=True, timeout=60, check=False, **options)


def test_a_killed_run_leaves_all_that_was_put_and_says_incomplete(tmp_path):
    outcome = run_python(VICTIM, tmp_path, Path(__file__).parent)
    assert outcome.returncode == -9, outcome.stderr
    assert os.listdir(tmp_path) == ["records.h5.partial"]
    records = open_records(tmp_path)
    assert not records.complete
    np.testing.assert_array_equal(records.seismograms["street"].velocity_z, seismograms(1950)["velocity_z"])
    assert len(records.snapshots) == 39
    np.testing.assert_array_equal(records.snapshots.frame("velocity_z", 38), np.full((4, 6), 39.5))
    write(tmp_path)  # the dead run's lock is gone with it
    assert open_records(tmp_path).complete
    assert os.listdir(tmp_path) == ["records.h5"]


READER = """
import sys
from groundroll.records import open_records
records = open_records(sys.argv[1])
print(records.complete, records.seismograms["street"].velocity_x.shape)
"""


def test_a_run_can_be_read_while_it_goes_on(tmp_path):
    with RecordsWriter(tmp_path, [LINE], None, {"version": "0.1"}, {}) as writer:
        writer.put_seismograms("street", 0.001 * np.arange(30), seismograms(30))
        outcome = run_python(READER, tmp_path)
        assert outcome.stdout.strip() == "False (3, 30)", outcome.stderr
        writer.put_seismograms("street", 0.001 * np.arange(60), seismograms(60))


def test_earlier_records_stay_until_the_new_ones_are_done(tmp_path):
    write(tmp_path, scale=1.0)
    with RecordsWriter(tmp_path, [LINE], None, {"version": "0.1"}, {}) as writer:
        writer.put_seismograms("street", 0.001 * np.arange(30), seismograms(30, 2.0))
        assert open_records(tmp_path).seismograms["street"].velocity_x.shape == (3, 2500)
        writer.finish(complete=True)
    np.testing.assert_array_equal(
        open_records(tmp_path).seismograms["street"].velocity_x, seismograms(30, 2.0)["velocity_x"]
    )


def test_leaving_without_finish_keeps_what_was_recorded_as_incomplete(tmp_path):
    with pytest.raises(ZeroDivisionError):
        with RecordsWriter(tmp_path, [LINE], None, {"version": "0.1"}, {}) as writer:
            writer.put_seismograms("street", 0.001 * np.arange(30), seismograms(30))
            _ = 1 / 0
    assert os.listdir(tmp_path) == ["records.h5"]
    records = open_records(tmp_path)
    assert not records.complete
    assert records.provenance["complete"] == 0
    assert records.seismograms["street"].velocity_x.shape == (3, 30)


def test_leaving_before_anything_was_recorded_leaves_earlier_records_alone(tmp_path):
    write(tmp_path)
    with pytest.raises(ZeroDivisionError):
        with RecordsWriter(tmp_path, [LINE], None, {"version": "0.1"}, {}):
            _ = 1 / 0
    assert os.listdir(tmp_path) == ["records.h5"]
    assert open_records(tmp_path).complete


def test_a_partial_file_is_never_taken_for_complete(tmp_path):
    write(tmp_path)
    os.rename(tmp_path / "records.h5", tmp_path / "records.h5.partial")
    assert not open_records(tmp_path).complete


SECOND = """
import sys
sys.path.insert(0, sys.argv[2])
from test_records import *
try:
    RecordsWriter(sys.argv[1], [LINE], None, {"version": "0.1"}, {})
except StorageError as error:
    print(error)
"""


def test_a_second_writer_is_told_and_the_first_goes_on(tmp_path):
    with RecordsWriter(tmp_path, [LINE], None, {"version": "0.1"}, {}) as writer:
        writer.put_seismograms("street", 0.001 * np.arange(30), seismograms(30))
        outcome = run_python(SECOND, tmp_path, Path(__file__).parent)
        expected = f"another run is writing its records into {tmp_path}; wait for it, or choose another folder with --out"
        assert outcome.stdout.strip() == expected, outcome.stderr
        writer.finish(complete=True)
        assert writer.records().seismograms["street"].velocity_x.shape == (3, 30)


def test_a_folder_that_cannot_be_made_is_named(tmp_path):
    (tmp_path / "file").write_text("not a folder")
    folder = tmp_path / "file" / "run"
    with pytest.raises(StorageError) as caught:
        write(folder)
    assert str(caught.value) == (
        f"opening the records failed at {folder}: a part of this path is a file, not a folder; "
        "choose another folder with --out"
    )


def test_a_folder_where_the_user_may_not_write_is_named(tmp_path):
    if os.geteuid() == 0:
        folder = Path("/proc/groundroll_run")  # root may write anywhere but here
    else:
        folder = tmp_path / "run"
        tmp_path.chmod(0o500)
    with pytest.raises(StorageError, match=f"opening the records failed at {folder}: "):
        write(folder)


FULL = """
import resource, sys
sys.path.insert(0, sys.argv[2])
from test_records import *
resource.setrlimit(resource.RLIMIT_FSIZE, (1_500_000, 1_500_000))
if sys.argv[3] == "unreserved":
    import groundroll.records.storage as storage
    storage.DiskFile.reserve = lambda self, size: None
wide = SnapshotFrame(COMPONENTS, np.arange(120.0), np.arange(50.0))
noise = np.random.default_rng(3).standard_normal((50, 120))
try:
    with RecordsWriter(sys.argv[1], [LINE], wide, {"version": "0.1"}, {}) as writer:
        for number in range(1, 400):
            time = 0.001 * np.arange(10 * number)
            writer.put_seismograms("street", time, seismograms(len(time)))
            writer.add_snapshot(0.02 * number, {name: noise for name in COMPONENTS})
except StorageError as error:
    print(number, error)
"""


@pytest.mark.parametrize("way", ["reserved", "unreserved"])
def test_a_disk_that_fills_up_is_told_and_what_was_recorded_stays_readable(tmp_path, way):
    """The system's own limit on the size of a file stands for the full disk: writes fail alike, in the same calls."""
    outcome = run_python(FULL, tmp_path, Path(__file__).parent, way)
    assert outcome.returncode == 0, outcome.stderr
    assert outcome.stderr == ""
    number, message = outcome.stdout.split(" ", 1)
    assert f"failed at {tmp_path}: the file has reached the largest size allowed there" in message
    records = open_records(tmp_path)
    assert not records.complete
    assert len(records.snapshots) == int(number) - 1 > 5
    noise = np.random.default_rng(3).standard_normal((50, 120)).astype("f4")
    for index in range(len(records.snapshots)):
        np.testing.assert_array_equal(records.snapshots.frame("velocity_z", index), noise)
    samples = len(records.seismograms["street"].time)
    np.testing.assert_array_equal(records.seismograms["street"].velocity_x, seismograms(samples)["velocity_x"])


def test_no_space_left_is_said_in_plain_words(tmp_path, monkeypatch):
    def full(handle, offset, length):
        raise OSError(28, "No space left on device")

    with RecordsWriter(tmp_path, [LINE], None, {"version": "0.1"}, {}) as writer:
        monkeypatch.setattr(os, "posix_fallocate", full)
        with pytest.raises(StorageError) as caught:
            writer.put_seismograms("street", 0.001 * np.arange(30), seismograms(30))
    assert str(caught.value) == (
        f"writing the seismograms failed at {tmp_path}: no space is left on that disk; free some, "
        "or choose a folder on another disk with --out"
    )


def test_missing_and_foreign_files_are_storage_errors(tmp_path):
    with pytest.raises(StorageError, match=r"it holds neither records\.h5 nor records\.h5\.partial"):
        open_records(tmp_path)
    with pytest.raises(StorageError, match="there is no such file or folder"):
        open_records(tmp_path / "nowhere")
    (tmp_path / "records.h5").write_text("no HDF5 at all")
    with pytest.raises(StorageError, match="cannot be read as records"):
        open_records(tmp_path)
    with h5py.File(tmp_path / "other.h5", "w") as hdf:
        hdf["a"] = 1
    with pytest.raises(StorageError, match="cannot be read as records"):
        open_records(tmp_path / "other.h5")


def test_wrong_names_and_shapes_are_refused(tmp_path):
    with pytest.raises(InputError, match="two sets of receivers have the name 'street'"):
        RecordsWriter(None, [LINE, LINE], None, {}, {})
    with pytest.raises(InputError, match="no quantity is called 'speed'"):
        RecordsWriter(None, [LINE], SnapshotFrame(("speed",), FRAME.x, FRAME.z), {}, {})
    with RecordsWriter(None, [LINE], FRAME, {}, {}) as writer:
        with pytest.raises(InputError, match=r"velocity_x has the shape \(3, 30\), not \(3, 31\)"):
            writer.put_seismograms("street", np.arange(31.0), seismograms(30))
        with pytest.raises(InputError, match="were not announced"):
            writer.add_snapshot(0.0, {"velocity_x": np.zeros((4, 6))})


def test_the_scene_is_plain_json(tmp_path):
    write(tmp_path)
    with h5py.File(tmp_path / "records.h5") as hdf:
        assert json.loads(hdf["texts/scene"].asstr()[()])["title"] == "Levee"
