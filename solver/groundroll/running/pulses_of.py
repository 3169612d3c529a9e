"""A scenario's pulses as functions of time."""

from collections.abc import Callable
from functools import partial
from pathlib import Path

import numpy as np

from groundroll.errors import InputError
from groundroll.scenario import Pulse
from groundroll.waves import pulses


def resolved_delay(pulse: Pulse) -> float | None:
    """Return the delay with its default in place: 1.5/frequency for a peak, 0 for a half sine."""
    if pulse.file is not None or pulse.delay is not None:
        return pulse.delay
    return 0.0 if pulse.shape == "half_sine" else pulses.DEFAULT_DELAY / pulse.frequency


def pulse_function(pulse: Pulse, folder: Path) -> Callable:
    """Return s(t) of a pulse; `folder` is where its file is looked for. Raises InputError for a bad file."""
    if pulse.file is not None:
        return read_pulse(folder / pulse.file)
    delay = resolved_delay(pulse)
    if pulse.shape == "half_sine":
        return partial(pulses.half_sine, duration=pulse.duration, delay=delay)
    return partial(getattr(pulses, pulse.shape), frequency=pulse.frequency, delay=delay)


def read_pulse(path: Path) -> pulses.Sampled:
    """Read columns time (s) and value from a CSV file; lines that start with a letter or # are headings."""
    try:
        lines = path.read_text(encoding="utf-8").splitlines()
    except (OSError, UnicodeDecodeError) as error:
        reason = error.strerror if isinstance(error, OSError) else "it is not UTF-8 text"
        raise InputError(f"{path}: the pulse file cannot be read ({reason}); check pulse.file") from error
    rows = [_row(path, n, line) for n, line in enumerate(lines, 1) if line.strip() and not _is_heading(line)]
    if len(rows) < 2:
        raise InputError(f"{path}: {len(rows)} samples; a pulse needs at least 2 lines of time,value")
    time, value = np.array(rows).T
    late = np.flatnonzero(np.diff(time) <= 0.0)
    if len(late):
        raise InputError(f"{path}: time {time[late[0] + 1]:g} s does not come after {time[late[0]]:g} s; sort the lines by time")
    return pulses.Sampled(time, value)


def _is_heading(line: str) -> bool:
    first = line.lstrip()[0]
    return first == "#" or (first.isalpha() and not line.lstrip().lower().startswith(("nan", "inf")))


def _row(path: Path, number: int, line: str) -> tuple[float, float]:
    parts = line.replace(";", ",").split(",")
    try:
        time, value = (float(p) for p in parts)
    except ValueError:
        time = value = np.nan
    if not (np.isfinite(time) and np.isfinite(value)):
        raise InputError(f"{path}:{number}: {line.strip()!r} is not a pair time,value of finite numbers; write e.g. 0.001,0.25")
    return time, value
