"""Whole runs as processes: what they print, what they leave, and what is left when they are stopped."""

import os
import resource
import signal
import time

import numpy as np

from groundroll import open_records

from ..running.small import SMALL, changed

# Several seconds of stepping, seismograms written at quarters of it.
LONG = changed(
    SMALL, ("length = 30.0", "length = 200.0"), ("depth = 15.0", "depth = 100.0"), ("duration = 0.25", "duration = 3.0"),
    ("[[ground.layer]]", "[mesh]\nspacing = 0.5\n[[ground.layer]]"), ('"displacement", "velocity", "acceleration"', '"velocity"'),
)  # fmt: skip


def test_a_run_and_its_figures(shell):
    shell.write("a.toml")
    done = shell("run", "a.toml", "--threads", 1)
    assert (done.returncode, done.stderr) == (0, "")
    lines = done.stdout.splitlines()
    table = next(n for n, line in enumerate(lines) if line.startswith("receivers"))
    assert [row.split()[0] for row in lines[table : table + 3]] == ["receivers", "line", "hole"]
    assert lines[-1] == "records in outputs/a; figures: groundroll draw outputs/a"
    line = open_records(shell.folder / "outputs/a").seismograms["line"]
    peak = 1e3 * np.hypot(line.velocity_x, line.velocity_z).max()
    assert lines[table + 1].split()[2] == f"{peak:.4g}"
    drawn = shell("draw", "outputs/a")
    assert (drawn.returncode, drawn.stderr) == (0, "")
    names = [path.removeprefix("outputs/a/figures/") for path in drawn.stdout.split()]
    assert {"record_section_line_velocity_z.png", "peaks_line.png", "wavefield_velocity_x.png", "ground.png"} <= set(names)
    for name in names:
        assert (shell.folder / "outputs/a/figures" / name).read_bytes()[:4] == b"\x89PNG"
    one = shell("draw", "outputs/a", "--only", "ground", "-q")
    assert (one.returncode, one.stdout, one.stderr) == (0, "", "")
    ground = shell.folder / "outputs/a/figures/ground.png"
    in_scale = ground.read_bytes()
    assert shell("draw", "outputs/a", "--only", "ground", "--stretch", "-q").returncode == 0
    assert ground.read_bytes() != in_scale


def test_quiet_prints_nothing(shell):
    shell.write("a.toml")
    done = shell("run", "a.toml", "-q", "--threads", 1, "--out", "here")
    assert (done.returncode, done.stdout, done.stderr) == (0, "", "")
    assert open_records(shell.folder / "here").complete


def test_the_order_changes_no_bit(shell):
    shell.write("a.toml")
    for out, more in (("one", ()), ("other", ("--order", 3, 25))):
        assert shell("run", "a.toml", "-q", "--threads", 2, "--out", out, *more).returncode == 0
    one, other = (open_records(shell.folder / out).seismograms["line"] for out in ("one", "other"))
    assert np.abs(one.velocity_z).max() > 0.0
    np.testing.assert_array_equal(one.velocity_z, other.velocity_z)


def test_one_of_two_fails_and_the_other_is_complete(shell):
    shell.write("wrong.toml", changed(SMALL, ("vs = 180.0", "vs = -1.0")))
    shell.write("right.toml")
    done = shell("run", "wrong.toml", "right.toml", "--threads", 1, "--out", "both")
    message = "wrong.toml:11: ground.layer[1].vs: too small (received -1.0); allowed 10 to 6000 m/s; write, say, vs = 150.0"
    assert done.returncode == 1
    assert done.stderr == f"groundroll run: {message}\n"
    assert done.stdout.splitlines()[-2:] == [f"both/wrong  failed: {message}", "both/right  done"]
    assert open_records(shell.folder / "both/right").complete
    assert not (shell.folder / "both/wrong").exists()


def stopped_midway(shell, *, by: int):
    """Start a long run, stop it by a signal when the first seismograms lie on the disk, and return how it ended."""
    process = shell.start("run", "a.toml", "--threads", 1)
    partial = shell.folder / "outputs/a/records.h5.partial"
    try:
        wait_for(lambda: partial.exists() and seismogram_samples(partial) > 100, process)
        process.send_signal(by)
        out, err = process.communicate(timeout=60)
    finally:
        process.kill()
    return process.returncode, out, err


def seismogram_samples(partial) -> int:
    try:
        return open_records(partial).seismograms["line"].time.size
    except Exception:  # not yet whole
        return 0


def wait_for(condition, process) -> None:
    end = time.monotonic() + 200.0
    while not condition():
        assert process.poll() is None, process.communicate()
        assert time.monotonic() < end
        time.sleep(0.05)


def test_ctrl_c_keeps_the_records_marked_incomplete(shell):
    shell.write("a.toml", LONG)
    status, out, err = stopped_midway(shell, by=signal.SIGINT)
    assert status == 130, err
    assert err.startswith("groundroll run: interrupted at t = ") and err.endswith(" s of 3 s; what was recorded is kept\n")
    assert len(err.splitlines()) == 1
    at = float(err.split()[6])
    records = open_records(shell.folder / "outputs/a")
    assert not records.complete and records.path.name == "records.h5"
    times = records.seismograms["line"].time
    # Up to where it was stopped, the last sample included.
    assert 0.7 < at < 3.0 and at - 0.0021 < times[-1] <= at + 1e-9
    assert np.abs(records.seismograms["line"].velocity_z).max() > 0.0
    assert shell("draw", "outputs/a", "-q").returncode == 0


def test_a_killed_run_leaves_a_readable_file_and_the_next_run_replaces_it(shell):
    shell.write("a.toml", LONG)
    status, _, _ = stopped_midway(shell, by=signal.SIGKILL)
    assert status == -signal.SIGKILL
    records = open_records(shell.folder / "outputs/a")
    assert not records.complete and records.path.name == "records.h5.partial"
    assert records.seismograms["line"].time[-1] > 0.7
    assert np.abs(records.seismograms["line"].velocity_z).max() > 0.0
    shell.write("a.toml")
    assert shell("run", "a.toml", "-q", "--threads", 1).returncode == 0
    assert open_records(shell.folder / "outputs/a").complete
    assert not records.path.exists()


def test_two_runs_in_one_folder_at_once(shell):
    shell.write("a.toml", LONG)
    first = shell.start("run", "a.toml", "--threads", 1)
    try:
        wait_for((shell.folder / "outputs/a/records.h5.partial").exists, first)
        shell.write("b.toml")
        second = shell("run", "b.toml", "--out", "outputs/a", "--threads", 1)
        message = (
            "groundroll run: another run is writing its records into outputs/a; "
            "wait for it, or choose another folder with --out\n"
        )
        assert (second.returncode, second.stderr) == (4, message)
        assert first.poll() is None
        assert (shell.folder / "outputs/a/scenario.toml").read_text() == LONG
    finally:
        first.kill()
        first.communicate()


def limit_files(size: int):
    """In the child: no file may grow beyond `size` bytes; a write beyond fails instead of killing it."""

    def limit():
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
        resource.setrlimit(resource.RLIMIT_FSIZE, (size, size))

    return limit


def test_a_disk_that_fills_up_ends_the_run_with_plain_words(shell):
    shell.write("a.toml", changed(SMALL, ("every = 0.05", "every = 0.002")))
    assert shell("run", "a.toml", "-q", "--threads", 1, "--out", "whole").returncode == 0  # machine code lies ready
    size = os.path.getsize(shell.folder / "whole/records.h5")
    done = shell("run", "a.toml", "-q", "--threads", 1, preexec_fn=limit_files(int(0.7 * size)))
    assert done.returncode == 4, done.stderr
    assert done.stderr.startswith("groundroll run: writing ") and len(done.stderr.splitlines()) == 1
    assert done.stderr.endswith(
        " failed at outputs/a: the file has reached the largest size allowed there; ask for fewer snapshots, or raise the limit\n"
    )
    records = open_records(shell.folder / "outputs/a")
    assert not records.complete
    assert len(records.snapshots) > 10
    assert np.isfinite(records.snapshots.frame("velocity_z", -1)).all()


def test_a_blown_up_run_ends_with_three(shell):
    """Nothing a scenario can say makes the fields grow, so the step is lengthened behind the planner's back."""
    shell.write("a.toml", changed(SMALL, ("duration = 0.25", "duration = 1.0")))
    code = (
        "import sys, numpy\n"
        "numpy.seterr(all='ignore')\n"
        "from groundroll.running import choices\n"
        "step = choices.time_step\n"
        "choices.time_step = lambda mesh, fastest: 1.3 * step(mesh, fastest)\n"
        "from groundroll.command import main\n"
        "sys.exit(main(['run', 'a.toml', '-q', '--threads', '1']))\n"
    )
    done = shell.python(code)
    assert done.returncode == 3, done.stderr
    assert done.stderr.startswith("groundroll run: the fields grew beyond all bounds by step ")
    assert len(done.stderr.splitlines()) == 1
    assert not open_records(shell.folder / "outputs/a").complete
