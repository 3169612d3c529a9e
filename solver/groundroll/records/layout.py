"""What stands in records.h5: the groups, and the one table that gives each quantity its units and name."""

from dataclasses import dataclass

import numpy as np

RECORDS = "records.h5"
PARTIAL = "records.h5.partial"

SEISMOGRAMS = "seismograms"
SNAPSHOTS = "snapshots"
LEDGER = "ledger"
GROUND = "ground"
TEXTS = "texts"
PROVENANCE = "provenance"
SCENE = "scene"


@dataclass(frozen=True)
class Quantity:
    """Units (SI, in the exponent form that array tools read) and the words for one quantity."""

    units: str
    long_name: str


QUANTITIES = {
    "velocity_x": Quantity("m s-1", "horizontal particle velocity, positive to the right"),
    "velocity_z": Quantity("m s-1", "vertical particle velocity, positive downward"),
    "displacement_x": Quantity("m", "horizontal displacement, positive to the right"),
    "displacement_z": Quantity("m", "vertical displacement, positive downward"),
    "acceleration_x": Quantity("m s-2", "horizontal acceleration, positive to the right"),
    "acceleration_z": Quantity("m s-2", "vertical acceleration, positive downward"),
    "stress_xx": Quantity("Pa", "horizontal normal stress, tension positive"),
    "stress_zz": Quantity("Pa", "vertical normal stress, tension positive"),
    "stress_xz": Quantity("Pa", "shear stress"),
    "divergence": Quantity("s-1", "divergence of particle velocity, dvx/dx + dvz/dz"),
    "curl": Quantity("s-1", "curl of particle velocity, dvx/dz - dvz/dx"),
}

AXES = {
    "time": Quantity("s", "time"),
    "receiver": Quantity("1", "receiver number along the line, from 0"),
    "x": Quantity("m", "horizontal position, growing to the right"),
    "z": Quantity("m", "depth below the datum, growing downward"),
    "depth": Quantity("m", "depth below the ground surface, growing downward"),
    "elevation": Quantity("m", "elevation above the datum, positive up"),
}


@dataclass(frozen=True)
class ReceiverLine:
    """Receivers that are recorded together; x, depth and elevation are arrays (receiver,), in m.

    depth is measured from the ground surface above each receiver, elevation is that of the receiver
    itself about the datum (positive up): the receiver stands at z = -elevation.
    """

    name: str
    x: np.ndarray
    depth: np.ndarray
    elevation: np.ndarray


@dataclass(frozen=True)
class SnapshotFrame:
    """The mesh nodes at which snapshots are stored, absorbing layers left out.

    x (nx,) and z (nz,) in m; elevation (nz, nx), positive up, where the mesh follows a terrain, else None.
    """

    fields: tuple[str, ...]
    x: np.ndarray
    z: np.ndarray
    elevation: np.ndarray | None = None
