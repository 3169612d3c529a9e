"""Records made from simple moving pulses, for drawing: no wave equation is solved here."""

import numpy as np

from groundroll.records import ReceiverLine, RecordsWriter, SnapshotFrame

SPEEDS = {"P": 400.0, "S": 170.0, "Rayleigh": 150.0}
SOURCE_X = 60.0
DELAY = 0.05
INTERFACE = [0.0, 120.0, 240.0], [20.0, 26.0, 22.0]  # x, depth


def ricker(time, frequency=25.0):
    a = (np.pi * frequency * (time - DELAY)) ** 2
    return (1.0 - 2.0 * a) * np.exp(-a)


def moveout(time, distance):
    """velocity_x, velocity_z (…): a weak fast pulse and a strong slow one; time and distance broadcast."""
    near = np.sqrt(distance + 1.0)
    fast = 2e-4 * ricker(time - distance / SPEEDS["P"]) / near**2
    slow = 5e-3 * ricker(time - distance / SPEEDS["Rayleigh"]) / near
    return fast - 0.6 * slow, slow + 0.3 * fast


def terrain(x):
    return 6.0 * np.exp(-(((x - 150.0) / 40.0) ** 2))


def write_records(folder, *, curved=False, count=32, complete=True):
    """A run of a section 240 m × 60 m with a surface line, a borehole, snapshots and its ground."""
    x, z = np.arange(0.0, 240.1, 1.0), np.arange(0.0, 60.1, 1.0)
    elevation = terrain(x) * (1.0 - z[:, None] / 60.0) - z[:, None] if curved else None
    top = terrain if curved else np.zeros_like
    street_x = np.linspace(70.0, 225.0, count)
    street = ReceiverLine("street", street_x, np.zeros(count), top(street_x))
    depths = np.array([0.0, 4.0, 8.0, 16.0, 28.0])
    borehole_x = np.full(5, 150.0)
    borehole = ReceiverLine("clinic borehole", borehole_x, depths, top(borehole_x) - depths)
    frame = SnapshotFrame(("velocity_x", "velocity_z"), x, z, elevation)
    time = 0.001 * np.arange(1200)
    with RecordsWriter(folder, [street, borehole], frame, {"version": "0.1.0"}, {"scenario": ""}) as writer:
        writer.put_scene(
            title="Pile driving beside a clinic, Quennet",
            sources=[{"name": "pile", "kind": "force", "x": SOURCE_X, "depth": -float(top(np.array(SOURCE_X)))}],
            interfaces=[{"x": [0.0, 240.0], "depth": [8.0, 8.0]}, {"x": INTERFACE[0], "depth": INTERFACE[1]}],
            guides=[{"wave": wave, "speed": speed, "x0": SOURCE_X, "t0": DELAY} for wave, speed in SPEEDS.items()],
            surface={"x": x, "depth": -terrain(x)} if curved else None,
        )  # fmt: skip
        writer.put_ground(_ground(x, z), x, z, elevation)
        for line in (street, borehole):
            distance = np.hypot(line.x - SOURCE_X, line.depth)[:, None]
            horizontal, vertical = moveout(time, distance)
            writer.put_seismograms(line.name, time, {"velocity_x": horizontal, "velocity_z": vertical})
        radius = np.hypot(x - SOURCE_X, z[:, None])
        for instant in np.arange(0.0, 1.0001, 0.05):
            horizontal, vertical = moveout(instant, radius)
            writer.add_snapshot(instant, {"velocity_x": horizontal, "velocity_z": vertical * np.exp(-z[:, None] / 20)})
        writer.put_ledger(time, {"energy": (time, "J m-1", "total energy")})
        writer.finish(complete=complete)
        return writer.records()


def _ground(x, z):
    depth = z[:, None] + 0.0 * x
    layer = np.where(depth < 8.0, 0, np.where(depth < np.interp(x, *INTERFACE), 1, 2))
    speed = np.array([160.0, 380.0, 900.0])[layer]
    return {
        "vp": (np.array([400.0, 1750.0, 2300.0])[layer], "m s-1", "P-wave speed"),
        "vs": (speed, "m s-1", "S-wave speed"),
        "density": (np.array([1800.0, 2050.0, 2300.0])[layer], "kg m-3", "density"),
        "qs": (np.array([12.0, 30.0, np.inf])[layer], "1", "quality factor of S waves"),
        "points_per_wavelength": (speed / 40.0, "1", "nodes per shortest wavelength"),
    }
