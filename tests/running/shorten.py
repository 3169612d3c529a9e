"""Scenarios made cheap: lower frequencies, longer pulses, a shorter time; the ground and all places stay."""

import re


def shortened(text: str, slower: float, duration: float) -> str:
    """The TOML `text` with all frequencies divided by `slower`, the run cut to `duration` s and two snapshots kept."""

    def scale(pattern: str, factor: float) -> None:
        nonlocal text
        text = re.sub(f"({pattern} = )([0-9.e+-]+)", lambda m: f"{m[1]}{float(m[2]) * factor!r}", text, flags=re.MULTILINE)

    scale("^highest_frequency", 1.0 / slower)
    scale(r'shape = "\w+", frequency', 1.0 / slower)
    scale('shape = "half_sine", duration', slower)
    text = re.sub(r"^duration = [0-9.]+", f"duration = {duration}", text, flags=re.MULTILINE)
    return re.sub(r"^every = [0-9.]+", f"every = {0.5 * duration}", text, flags=re.MULTILINE)
