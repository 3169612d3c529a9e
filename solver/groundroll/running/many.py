"""Several scenarios one after another, each into its own folder; a failure stops none of the others."""

import sys
from pathlib import Path

from groundroll.errors import GroundrollError, InputError, Interrupted
from groundroll.running.run import run
from groundroll.running.summary import peaks_table
from groundroll.scenario import Scenario
from groundroll.waves.march import Order

DEFAULT_FOLDER = Path("outputs")


def folders_for(files: list[Path], out: Path | None) -> list[Path]:
    """Return a folder for each scenario: `out` itself for one, `out`/<file stem> for several.

    Raises InputError if two scenarios would share a folder.
    """
    if len(files) == 1:
        return [out if out is not None else DEFAULT_FOLDER / files[0].stem]
    folders = [(out if out is not None else DEFAULT_FOLDER) / f.stem for f in files]
    for n, folder in enumerate(folders):
        if folder in folders[:n]:
            raise InputError(f"{files[n]} and {files[folders.index(folder)]} would both run in {folder}; rename one of the files")
    return folders


def run_all(files: list[Path], out: Path | None, threads: int | None, quiet: bool, order: Order | None = None) -> int:
    """Run all scenarios and return the exit status: that of a single one, or 1 if any of several failed."""
    folders = folders_for(files, out)
    if len(files) == 1:
        run_one(files[0], folders[0], threads, quiet, order)
        return 0
    outcomes = []
    for file, folder in zip(files, folders, strict=True):
        try:
            run_one(file, folder, threads, quiet, order)
            outcomes.append("done")
        except Interrupted:
            raise
        except GroundrollError as error:
            print(f"groundroll run: {error}", file=sys.stderr)
            outcomes.append(f"failed: {str(error).splitlines()[0]}")
    if not quiet:
        print()
        for folder, outcome in zip(folders, outcomes, strict=True):
            print(f"{folder}  {outcome}")
    return 0 if all(o == "done" for o in outcomes) else 1


def run_one(file: Path, folder: Path, threads: int | None, quiet: bool, order: Order | None) -> None:
    scenario = Scenario.load(file)
    records = run(scenario, out=folder, threads=threads, quiet=quiet, order=order)
    if not quiet:
        print(peaks_table(records))
        print(f"records in {folder}; figures: groundroll draw {folder}")
