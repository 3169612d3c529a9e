"""Scenarios made cheap: lower frequencies, longer pulses, a shorter time; the ground and all places stay."""

import re


def shortened(text: str, slower: float, duration: float) -> str:
    """The TOML `text` with all its frequencies divided by `slower` and the run cut to `duration` s."""

    def scaled(key: str, factor: float, text: str) -> str:
        return re.sub(rf"\b{key} = ([0-9.e+-]+)", lambda m: f"{key} = {float(m[1]) * factor!r}", text)

    text = re.sub(r"^duration = [0-9.]+", f"duration = {duration}", text, count=1, flags=re.MULTILINE)
    for key in ("highest_frequency", r"(?<=, )frequency"):
        text = re.sub(rf"(?:\b|(?<=, )){key.removeprefix('(?<=, )')} = ([0-9.e+-]+)", _divided(slower), text)
    text = re.sub(r"(?<=half_sine\", )duration = ([0-9.e+-]+)", _divided(1.0 / slower), text)
    return re.sub(r"^every = [0-9.]+", f"every = {0.5 * duration}", text, flags=re.MULTILINE)
