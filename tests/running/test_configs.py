"""Every scenario in configs/ plans as it stands and runs shortened."""

from pathlib import Path

import numpy as np
import pytest

from groundroll import Scenario, plan, run

from .shorten import shortened

CONFIGS = sorted((Path(__file__).parents[2] / "configs").glob("*.toml"))
# Slower by, and s of records: about a second of stepping each.
SHORT = {
    "pile_by_clinic": (4.0, 0.3),
    "pile_by_clinic_trench": (4.0, 0.3),
    "levee_hammer_line": (2.0, 0.3),
    "levee_hammer_line_lens": (3.0, 0.3),
    "quennet_town_buried_source": (3.0, 3.0),
    "veddle_valley_earthquake": (4.0, 3.0),
}


def test_each_file_has_its_shortening():
    assert {path.stem for path in CONFIGS} == set(SHORT)


@pytest.mark.parametrize("path", CONFIGS, ids=lambda path: path.stem)
def test_plans_as_it_stands_within_its_accuracy(path):
    made = plan(Scenario.load(path), threads=1)
    assert made.choice.misfit <= made.scenario.mesh.accuracy
    assert not [text for text in made.warnings if "lies above highest_frequency" not in text]


@pytest.mark.parametrize("path", CONFIGS, ids=lambda path: path.stem)
def test_runs_shortened(path):
    scenario = Scenario.from_text(shortened(path.read_text(encoding="utf-8"), *SHORT[path.stem]))
    scenario._folder = path.parent
    records = run(scenario, threads=1)
    assert records.complete
    for line in records.seismograms.values():
        for name in ("velocity_x", "velocity_z"):
            assert np.isfinite(line.arrays[name]).all()
            assert np.abs(line.arrays[name]).max() > 0.0
    totals = records.ledger.kinetic_energy + records.ledger.strain_energy
    assert np.isfinite(totals).all() and totals.max() > 0.0
