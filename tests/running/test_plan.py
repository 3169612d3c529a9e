"""What the planner chooses, says and refuses."""

import re

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll import Scenario, plan
from groundroll.errors import InputError
from groundroll.running.choices import sample_interval, sample_times
from groundroll.running.error_law import expected_misfit

from .small import small


def with_spacing(value: float) -> tuple[str, str]:
    return ("[[ground.layer]]", f"[mesh]\nspacing = {value}\n[[ground.layer]]")


@pytest.mark.parametrize("accuracy", [0.009, 0.01, 0.05])
def test_spacing_follows_from_accuracy(accuracy):
    made = plan(small(("[[ground.layer]]", f"[mesh]\naccuracy = {accuracy}\n[[ground.layer]]")))
    choice = made.choice
    assert choice.misfit <= accuracy
    # Shortest wave: 180 m/s at 40 Hz, 4.5 m.
    assert_allclose(choice.points_per_wavelength, 4.5 / choice.spacing, rtol=1e-12, atol=0)
    # Farthest receiver, 16 m away, in wavelengths at the Ricker pulse's peak: 5 % of it is left at 2.3966 times that.
    assert_allclose(choice.wavelengths, 16.0 / (4.5 * 2.3966362), rtol=1e-6, atol=0)
    assert made.mesh.spacing == choice.spacing == made.scenario.mesh.spacing


def test_a_finer_accuracy_takes_a_finer_mesh():
    spacings = [plan(small(("[[ground.layer]]", f"[mesh]\naccuracy = {a}\n[[ground.layer]]"))).mesh.spacing for a in (0.05, 0.006)]
    assert spacings[1] < spacings[0]


def test_the_user_s_spacing_is_kept_and_judged():
    coarse = plan(small(with_spacing(1.0)))
    assert coarse.mesh.spacing == 1.0
    assert_allclose(coarse.choice.misfit, expected_misfit(4.5, 16.0 / (4.5 * 2.3966362)), rtol=1e-6, atol=0)
    assert coarse.choice.misfit > 0.01
    found = [text for text in coarse.warnings if text.startswith("expected error")]
    assert len(found) == 1 and found[0].endswith("use a smaller mesh.spacing")
    assert not [t for t in plan(small(with_spacing(0.5))).warnings if t.startswith("expected error")]


def test_a_closed_section_is_filled_by_whole_cells():
    made = plan(small(with_spacing(0.7), ("spacing = 0.7", 'spacing = 0.7\nedges = { left = "rigid", right = "rigid" }')))
    assert_allclose(30.0 / made.mesh.spacing, round(30.0 / made.mesh.spacing), rtol=1e-12, atol=0)
    assert 0.68 < made.mesh.spacing <= 0.7


def test_time_step_is_below_the_limit_of_the_sixth_order_scheme():
    made = plan(small())
    # Vp dt/h at the 6th-order limit (Levander's form, carried to 6th order): 0.569482; 95 % of it is taken.
    share = made.fastest * made.clock.dt / made.mesh.spacing / 0.569482
    assert 0.94 < share <= 0.95


def test_absorbing_layers_lie_outside_the_section():
    mesh = plan(small()).mesh
    x = mesh.x_node[mesh.section_columns]
    assert x[0] == 0.0 and x[-1] >= 30.0 > x[-2]
    assert mesh.nx == len(x) + mesh.absorbing[0] + mesh.absorbing[1]
    assert mesh.depth_node[mesh.section_rows][0] == 0.0


def test_sample_times_begin_at_zero_and_reach_the_duration():
    times = sample_times(small())
    assert_allclose(times, 0.002 * np.arange(126), rtol=0, atol=1e-15)


@pytest.mark.parametrize(("frequency", "interval"), [(40.0, 0.002), (50.0, 0.002), (60.0, 0.001), (8.0, 0.01), (1000.0, 0.0001)])
def test_sample_interval_holds_ten_samples_a_period(frequency, interval):
    scenario = small(("sample_interval = 0.002\n", ""), ("highest_frequency = 40.0", f"highest_frequency = {frequency}"))
    assert_allclose(sample_interval(scenario), interval, rtol=1e-12, atol=0)
    assert sample_interval(scenario) <= 0.1 / frequency * (1 + 1e-9)


@pytest.mark.parametrize(
    "changes",
    [
        (),
        (("density = 1800.0", "density = 1800.0\nqp = 40.0\nqs = 20.0"), ("sample_interval = 0.002\n", "")),
        (with_spacing(0.6), ("spacing = 0.6", "spacing = 0.6\ngraded = true")),
        (("[[source]]", '[ground.terrain]\nshape = "hill"\ncentre = 15.0\nheight = 2.0\nhalf_width = 10.0\n[[source]]'),),
        (('shape = "ricker", frequency = 16.0', 'shape = "half_sine", duration = 0.05'),),
    ],
    ids=["plain", "lossy", "graded", "terrain", "half_sine"],
)
def test_the_resolved_scenario_gives_the_same_plan(changes):
    first = plan(small(*changes))
    again = plan(Scenario.from_text(first.scenario.resolved_text()))
    assert again.scenario == first.scenario
    assert (again.clock.dt, again.clock.steps) == (first.clock.dt, first.clock.steps)
    assert (again.mesh.nx, again.mesh.nz, again.mesh.spacing) == (first.mesh.nx, first.mesh.nz, first.mesh.spacing)
    np.testing.assert_array_equal(again.mesh.depth_node, first.mesh.depth_node)
    assert str(again) == str(first)


def test_a_plan_says_what_a_run_will_do():
    made = plan(small())
    rows = dict(line.split(maxsplit=1) for line in str(made).splitlines() if not line.startswith(("time step", "expected", "warning")))
    assert rows["mesh"].startswith(f"{made.mesh.nx} x {made.mesh.nz} = ")
    assert f"{made.clock.steps} steps for 0.25 s" in str(made)
    assert rows["precision"] == "single"


def test_warnings_name_pulse_and_lateness():
    made = plan(small(("frequency = 16.0", "frequency = 30.0"), ("duration = 0.25", "duration = 0.09")))
    texts = "\n".join(made.warnings)
    assert 'source "hammer": ' in texts and "lies above highest_frequency = 40 Hz" in texts
    assert "the slowest surface wave needs about 0.099 s to the farthest receiver, longer than section.duration = 0.09 s" in texts


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        (
            (("highest_frequency = 40.0", 'highest_frequency = 40.0\ngeometry = "point"'),),
            'section.geometry: "point" is not computed yet; allowed "line"; remove the key',
        ),
        (
            (
                ("[[source]]", '[ground.terrain]\nshape = "hill"\ncentre = 15.0\nheight = 2.0\nhalf_width = 10.0\n[[source]]'),
                ("[[ground.layer]]", '[mesh]\nedges = { top = "absorb" }\n[[ground.layer]]'),
            ),
            'mesh.edges.top: "absorb" does not go with ground.terrain; allowed: "free"; remove [ground.terrain] or the key',
        ),
    ],
)
def test_what_cannot_be_computed_is_refused_with_one_fix(changes, message):
    with pytest.raises(InputError) as refusal:
        plan(small(*changes))
    assert str(refusal.value) == message


def test_too_great_a_relief_is_refused_with_a_depth_that_serves():
    terrain = ("[[source]]", "[ground.terrain]\npoints = [[0.0, 0.0], [15.0, 11.0], [30.0, 0.0]]\n[[source]]")
    with pytest.raises(InputError) as refusal:
        plan(small(terrain))
    found = re.fullmatch(
        r"section\.depth: 15 m is too shallow for a relief of ([0-9.]+) m; "
        r"allowed: at least 2 times the relief; write section\.depth = (\d+)",
        str(refusal.value),
    )
    assert found, refusal.value
    assert 7.5 < float(found[1]) < 11.0  # the kinks are rounded
    plan(small(terrain, ("depth = 15.0", f"depth = {found[2]}.0")))


def test_a_cliff_is_refused():
    with pytest.raises(InputError) as refusal:
        plan(small(("[[source]]", "[ground.terrain]\npoints = [[0.0, 0.0], [13.0, 0.0], [16.0, 6.0], [30.0, 6.0]]\n[[source]]")))
    assert str(refusal.value).startswith("ground.terrain: the slope at x = 1")
    assert str(refusal.value).endswith(" degrees; allowed: up to 45 degrees; flatten the terrain there")


def test_a_mesh_beyond_the_memory_is_refused_with_a_spacing_that_fits(monkeypatch):
    from groundroll.running import plan as module

    size = {"SC_PHYS_PAGES": 1000, "SC_PAGE_SIZE": 1000}
    monkeypatch.setattr(module.os, "sysconf", size.get)
    with pytest.raises(InputError, match=r"million cells need .* GB of memory; this machine has 0\.0 GB; write mesh\.spacing = "):
        plan(small(with_spacing(0.2)))


@pytest.mark.parametrize(("quality", "received"), [("qp = 80.0\nqs = 20.0", "qp = 80"), ("qs = 20.0", "no qp")])
def test_a_bulk_modulus_that_gives_energy_is_refused(quality, received):
    """vp^2/qp >= 4/3 vs^2/qs: with 350 and 180 m/s, qs = 20, qp may be 0.75 (350/180)^2 20 = 56.71 at most."""
    layer = "vp = 350.0\nvs = 180.0\ndensity = 1800.0\n"
    with pytest.raises(InputError) as refusal:
        plan(small((layer, layer + quality + "\n")))
    assert str(refusal.value) == (
        "ground: with qs = 20, vp = 350 and vs = 180 m/s the bulk modulus would give energy "
        f"(received {received}); allowed: qp up to 0.75 (vp/vs)^2 qs = 56.71; write qp = 56 or less"
    )
    plan(small((layer, layer + "qp = 56.0\nqs = 20.0\n")))
