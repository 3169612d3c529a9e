"""Pictures of a run, drawn from its records alone and redrawable at any time."""

import re
from collections.abc import Callable, Iterator
from functools import partial
from pathlib import Path

from matplotlib.figure import Figure

from groundroll.errors import InputError
from groundroll.figures.ground import draw_ground
from groundroll.figures.peaks import draw_peaks
from groundroll.figures.record_section import draw_record_section
from groundroll.figures.wavefield import draw_wavefield
from groundroll.records import Records, open_records
from groundroll.records.storage import plain_errors

KINDS = ("record_section", "peaks", "wavefield", "ground")


def draw(folder: str | Path, only: str | None = None, dpi: int = 150, stretch: bool = False) -> list[Path]:
    """Draw all figures of a run, or only those of one kind (of KINDS), as PNG files into folder/figures/.

    The ground has one scale for x and depth, or is stretched to fill its panels.

    Returns the files in the order drawn. Raises StorageError if the records cannot be read or the pictures
    not written, InputError for an unknown kind.
    """
    if only is not None and only not in KINDS:
        raise InputError(f"no figure is called {only!r}; known: {', '.join(KINDS)}")
    records = open_records(folder)
    place = records.path.parent / "figures"
    drawn = []
    with plain_errors("writing the figures", place):
        place.mkdir(exist_ok=True)
    for name, make in _figures(records, only, stretch):
        path = place / f"{name}.png"
        figure = make()
        with plain_errors("writing the figures", place):
            figure.savefig(path, dpi=dpi)
        drawn.append(path)
    return drawn


def _figures(records: Records, only: str | None, stretch: bool) -> Iterator[tuple[str, Callable[[], Figure]]]:
    """File stem and drawing function of each figure that the records allow."""
    wanted = KINDS if only is None else (only,)
    for name, line in zip(_stems(records.seismograms), records.seismograms.values(), strict=True):
        if len(line.time) < 2:
            continue
        if "record_section" in wanted:
            for quantity in line.arrays:
                yield f"record_section_{name}_{quantity}", partial(draw_record_section, records, line.name, quantity)
        if "peaks" in wanted and {"velocity_x", "velocity_z"} <= set(line.arrays):
            yield f"peaks_{name}", partial(draw_peaks, records, line.name)
    if "wavefield" in wanted and records.snapshots is not None and len(records.snapshots):
        for field in records.snapshots.fields:
            yield f"wavefield_{field}", partial(draw_wavefield, records, field)
    if "ground" in wanted and records.ground is not None and records.ground.arrays:
        yield "ground", partial(draw_ground, records, not stretch)


def _stems(names) -> list[str]:
    """Receivers names made fit for file names, each still its own."""
    stems = []
    for name in names:
        stem = re.sub(r"[^\w.-]+", "_", name)
        while stem in stems:
            stem += "_"
        stems.append(stem)
    return stems
