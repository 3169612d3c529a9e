"""What is remembered of this machine between runs: how fast it steps."""

import json
import os

from groundroll.waves.jit import cache_folder

# Cell-steps per second and thread before anything has been measured (a laptop of 2020 or so, assumed).
ASSUMED_RATE = 2.0e8


def available_threads() -> int:
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else os.cpu_count() or 1


def expected_rate(threads: int | None) -> float:
    """Return cell-steps per second with `threads` threads (all by default), as last measured here."""
    count = threads or available_threads()
    try:
        known = json.loads(_file().read_text())
        return float(known["rate_per_thread"]) * count
    except (OSError, ValueError, KeyError, TypeError):
        return ASSUMED_RATE * count


def has_compiled() -> bool:
    """Whether machine code of this version lies in the cache."""
    return any(cache_folder().rglob("marching*.nbi"))


def remember_rate(rate: float, threads: int) -> None:
    """Keep a measured rate; a machine without a writable cache simply forgets."""
    try:
        _file().parent.mkdir(parents=True, exist_ok=True)
        _file().write_text(json.dumps({"rate_per_thread": rate / threads}))
    except OSError:
        pass


def _file():
    return cache_folder() / "machine.json"
