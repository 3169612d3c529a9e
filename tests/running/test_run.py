"""A run keeps its promises: on disk as in memory, the whole contract of records.h5, nothing pretended."""

import hashlib
import signal
import tomllib

import h5py
import numpy as np
import pytest
import xarray as xr
from numpy.testing import assert_allclose, assert_array_equal

from groundroll import Scenario, open_records, plan, run
from groundroll.errors import ComputationError, InputError, Interrupted, StorageError
from groundroll.running import observers

from .small import SMALL, small

QUANTITIES = [f"{quantity}_{c}" for quantity in ("displacement", "velocity", "acceleration") for c in "xz"]


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    place = tmp_path_factory.mktemp("runs") / "deep" / "small"
    run(small(), out=place, threads=1)
    return place


@pytest.fixture(scope="module")
def in_memory():
    return run(small(), threads=1)


def test_a_run_leaves_these_files(folder):
    assert {path.name for path in folder.iterdir()} == {"records.h5", "scenario.toml", "resolved.toml", "run.log"}
    assert (folder / "scenario.toml").read_text() == SMALL
    log = (folder / "run.log").read_text()
    assert log.startswith(str(plan(small()))[:60])
    assert log.rstrip().endswith("complete")


def test_in_memory_equals_on_disk(folder, in_memory):
    disk = open_records(folder)
    assert in_memory.path is None and disk.path == folder / "records.h5"
    for name, line in disk.seismograms.items():
        other = in_memory.seismograms[name]
        assert_array_equal(line.time, other.time)
        for quantity in QUANTITIES:
            assert_array_equal(line.arrays[quantity], other.arrays[quantity])
    for field in disk.snapshots.fields:
        assert_array_equal(disk.snapshots.frame(field, 3), in_memory.snapshots.frame(field, 3))
    assert_array_equal(disk.ledger.strain_energy, in_memory.ledger.strain_energy)
    assert_array_equal(disk.ground.vs, in_memory.ground.vs)


def test_the_resolved_scenario_gives_the_same_run(folder, in_memory):
    again = run(Scenario.load(folder / "resolved.toml"), threads=1)
    assert_array_equal(again.seismograms["line"].velocity_z, in_memory.seismograms["line"].velocity_z)


def test_provenance_holds_what_the_contract_names(folder):
    with h5py.File(folder / "records.h5") as hdf:
        found = dict(hdf["provenance"].attrs)
    made = plan(small())
    assert found["complete"] == 1
    assert found["mesh_cells"] == made.mesh.nx * made.mesh.nz
    assert (found["time_step"], found["steps"], found["threads"], found["precision"]) == (made.clock.dt, made.clock.steps, 1, "single")
    assert found["scenario_sha256"] == hashlib.sha256(SMALL.encode()).hexdigest()
    assert found["stepping_seconds"] > 0.0 and found["recording_seconds"] > 0.0 and found["compile_seconds"] >= 0.0
    assert found["version"] and np.datetime64(found["created"].removesuffix("+00:00")) > np.datetime64("2020-01-01")
    assert "downward" in found["axes"]


def test_xarray_opens_each_group(folder):
    opened = {}
    for group in ("seismograms/line", "seismograms/hole", "snapshots", "ledger", "ground"):
        with xr.open_dataset(folder / "records.h5", group=group, engine="h5netcdf") as data:
            opened[group] = data.load()
        for name, array in opened[group].variables.items():
            assert array.attrs["units"] and array.attrs["long_name"], (group, name)
    line = opened["seismograms/line"]
    assert set(QUANTITIES) <= set(line) and line.velocity_x.dims == ("receiver", "time")
    assert_allclose(line.time, 0.002 * np.arange(126), rtol=0, atol=1e-12)
    assert_allclose(line.x, [12.0, 16.0, 20.0, 24.0], rtol=0, atol=1e-12)
    assert_allclose(opened["seismograms/hole"].depth, [0.0, 3.0], rtol=0, atol=0)
    assert opened["snapshots"].velocity_z.dims == ("time", "z", "x")
    # Asked for every 0.05 s; a snapshot stands at the half step nearest to that.
    assert_allclose(opened["snapshots"].time, 0.05 * np.arange(6), rtol=0, atol=plan(small()).clock.dt)
    assert {"momentum_x", "momentum_z", "kinetic_energy", "strain_energy", "impulse_z"} <= set(opened["ledger"])


def test_displacement_velocity_and_acceleration_belong_together(in_memory):
    line = in_memory.seismograms["line"]
    for rate, value in (("velocity_z", "displacement_z"), ("acceleration_z", "velocity_z")):
        middle = np.gradient(line.arrays[value], line.time, axis=1)[:, 2:-2]
        peak = np.abs(line.arrays[rate]).max()
        # Central differences of a 40 Hz wave sampled at 2 ms are low by (2 pi 40 0.002)^2/6, 4 %, at most.
        assert_allclose(middle, line.arrays[rate][:, 2:-2], rtol=0, atol=0.04 * peak)


def test_momentum_is_the_impulse_of_the_source_until_waves_leave(in_memory):
    """The nearest edge is 8 m away, 23 ms for P at 350 m/s: at 56 ms it sees the pulse's first thousandths only."""
    ledger = in_memory.ledger
    early = ledger.time < 0.056
    peak = np.abs(ledger.impulse_z[early]).max()
    assert early.sum() >= 6 and peak > 5.0
    assert_allclose(ledger.momentum_z[early], ledger.impulse_z[early], rtol=0, atol=0.005 * peak)
    assert np.abs(ledger.impulse_x).max() == 0.0


def test_the_ground_on_the_mesh_is_the_ground_given(in_memory):
    ground = in_memory.ground
    z = ground.z
    shallow, deep = ground.vs[(z > 0.6) & (z < 3.0)], ground.vs[z > 5.0]
    assert_allclose(shallow, 180.0, rtol=1e-5, atol=0)
    assert_allclose(deep, 300.0, rtol=1e-5, atol=0)


def test_double_precision_differs_by_rounding_only(in_memory):
    double = run(small(("[[ground.layer]]", '[mesh]\nprecision = "double"\n[[ground.layer]]')), threads=1)
    single = in_memory.seismograms["line"].velocity_z
    found = double.seismograms["line"].velocity_z
    # A thousand steps of single rounding, 6e-8 each, hardly add up.
    assert_allclose(single, found, rtol=0, atol=2e-5 * np.abs(found).max())
    assert double.provenance["precision"] == "double"


def test_snapshots_alone_are_enough():
    text = SMALL[: SMALL.index("[[receivers]]")] + SMALL[SMALL.index("[snapshots]") :]
    records = run(Scenario.from_text(text), threads=1)
    assert records.seismograms == {} and len(records.snapshots) == 6 and records.complete


def test_two_threads_give_the_same_bits(in_memory):
    assert_array_equal(run(small(), threads=2).seismograms["line"].velocity_x, in_memory.seismograms["line"].velocity_x)


def test_fields_that_are_no_numbers_stop_the_run_and_keep_what_was_recorded(tmp_path, monkeypatch):
    note = observers.Ledger.note

    def spoilt(self):
        values = note(self)
        return values * np.nan if len(self.steps) > 20 else values

    monkeypatch.setattr(observers.Ledger, "note", spoilt)
    with pytest.raises(ComputationError, match=r"^the fields grew beyond all bounds by step \d+ \(t = 0\.\d+ s\); what was recorded before is kept"):
        run(small(), out=tmp_path, threads=1)
    records = open_records(tmp_path)
    assert not records.complete
    # Seismograms are put at quarters of the run; it died a little after the second.
    assert 40 < records.seismograms["line"].velocity_z.shape[1] < 126


def test_a_steeply_unstable_step_is_caught(tmp_path, monkeypatch):
    from groundroll.running import choices

    step = choices.time_step
    monkeypatch.setattr(choices, "time_step", lambda mesh, fastest: 1.3 * step(mesh, fastest))
    with np.errstate(all="ignore"), pytest.raises(ComputationError, match="grew beyond all bounds"):
        run(small(("duration = 0.25", "duration = 1.0")), out=tmp_path, threads=1)
    assert not open_records(tmp_path).complete


def test_ctrl_c_in_the_midst_of_a_write_waits_for_its_end(tmp_path, monkeypatch):
    put = observers.Seismograms.see
    done = []

    def pressed_within(self, simulation):
        if not done:
            signal.raise_signal(signal.SIGINT)
        put(self, simulation)
        done.append(simulation.step)

    monkeypatch.setattr(observers.Seismograms, "see", pressed_within)
    with pytest.raises(Interrupted, match=r"^interrupted at t = 0\.\d+ s of 0\.25 s; what was recorded is kept$"):
        run(small(), out=tmp_path, threads=1)
    assert len(done) == 2 and done[0] == done[1]  # the write went on to its end; then all was written once more
    assert signal.getsignal(signal.SIGINT) is signal.default_int_handler
    assert not open_records(tmp_path).complete


def test_nothing_is_written_for_a_wrong_scenario(tmp_path):
    with pytest.raises(InputError):
        run(small(("highest_frequency = 40.0", 'highest_frequency = 40.0\ngeometry = "point"')), out=tmp_path / "new", threads=1)
    assert list(tmp_path.iterdir()) == []


def test_a_folder_that_is_a_file_is_refused(tmp_path):
    (tmp_path / "taken").write_text("")
    with pytest.raises(StorageError) as refusal:
        run(small(), out=tmp_path / "taken", threads=1)
    assert str(refusal.value) == f"{tmp_path / 'taken'}: the folder cannot be made (File exists); choose another with --out"


def test_records_that_do_not_fit_the_disk_are_refused(tmp_path, monkeypatch):
    from groundroll.running import plan as module

    monkeypatch.setattr(module.shutil, "disk_usage", lambda place: type("Usage", (), {"free": 1000})())
    with pytest.raises(InputError) as refusal:
        run(small(), out=tmp_path / "new", threads=1)
    assert str(refusal.value).startswith(f"{tmp_path / 'new'}: the records take up to ")
    assert str(refusal.value).endswith(" are free; write a larger snapshots.every or choose another folder with --out")
    assert list(tmp_path.iterdir()) == []


def test_the_stored_scenario_is_toml_as_given(folder):
    assert tomllib.loads((folder / "resolved.toml").read_text())["mesh"]["spacing"] == plan(small()).mesh.spacing
    assert open_records(folder).texts["scenario"] == SMALL
