"""Peak motion of a receiver: each component, and the resultant of both."""

from dataclasses import dataclass

import numpy as np

from groundroll.errors import InputError


@dataclass(frozen=True)
class Peaks:
    """Peaks by receiver, in the units of the traces, and the times (s) at which each is first reached.

    horizontal, vertical: max |v_x|, max |v_z|; resultant: max √(v_x² + v_z²), taken instant by instant, so
    it lies between the greater of the two and √2 times that.
    """

    horizontal: np.ndarray
    vertical: np.ndarray
    resultant: np.ndarray
    horizontal_time: np.ndarray
    vertical_time: np.ndarray
    resultant_time: np.ndarray


def peak_motion(time: np.ndarray, horizontal: np.ndarray, vertical: np.ndarray) -> Peaks:
    """Peaks of traces (receiver, time) given at the instants time (time,) in s.

    The greatest sample is taken, nothing is drawn between samples: of a sine with n samples a period it may
    be low by up to 1 - cos(π/n), 1.2 % at n = 20. Raises InputError for empty traces or shapes that differ.
    """
    horizontal, vertical = np.atleast_2d(horizontal), np.atleast_2d(vertical)
    if horizontal.shape != vertical.shape or horizontal.shape[-1] != len(time) or len(time) == 0:
        raise InputError(
            f"peaks need both components at the same instants: horizontal {horizontal.shape}, "
            f"vertical {vertical.shape}, time {np.shape(time)}"
        )
    found = [_peak(time, np.abs(values)) for values in (horizontal, vertical)]
    found.append(_peak(time, np.hypot(horizontal, vertical)))
    values, times = zip(*found, strict=True)
    return Peaks(*values, *times)


def _peak(time: np.ndarray, size: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    where = size.argmax(axis=-1)
    return np.take_along_axis(size, where[:, None], axis=-1)[:, 0], np.asarray(time)[where]
