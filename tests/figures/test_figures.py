"""Figures hold what the records hold, with units on each axis, and are drawn from the file alone."""

import sys
from pathlib import Path

import numpy as np
import pytest
from matplotlib.collections import LineCollection
from numpy.testing import assert_allclose
from PIL import Image

from groundroll.errors import InputError, StorageError
from groundroll.figures import draw
from groundroll.figures.ground import draw_ground
from groundroll.figures.peaks import draw_peaks
from groundroll.figures.record_section import draw_record_section
from groundroll.figures.style import display_scale
from groundroll.figures.wavefield import draw_wavefield
from groundroll.records import ReceiverLine, RecordsWriter, SnapshotFrame

sys.path.insert(0, str(Path(__file__).parent))
from synthetic_records import SOURCE_X, SPEEDS, terrain, write_records  # noqa: E402


@pytest.fixture(scope="module")
def flat():
    return write_records(None)


@pytest.fixture(scope="module")
def curved():
    return write_records(None, curved=True, complete=False)


def caption(figure):
    return figure.get_supxlabel()


def test_all_figures_of_a_run_are_written_and_redrawn(tmp_path):
    write_records(tmp_path)
    names = [
        "record_section_street_velocity_x.png", "record_section_street_velocity_z.png", "peaks_street.png",
        "record_section_clinic_borehole_velocity_x.png", "record_section_clinic_borehole_velocity_z.png",
        "peaks_clinic_borehole.png", "wavefield_velocity_x.png", "wavefield_velocity_z.png", "ground.png",
    ]  # fmt: skip
    drawn = draw(tmp_path, dpi=60)
    assert drawn == [tmp_path / "figures" / name for name in names]
    with Image.open(drawn[0]) as picture:
        assert picture.size == (480, 432)
        assert np.ptp(np.asarray(picture.convert("L"))) > 150  # ink on paper, not an empty page
    assert draw(tmp_path, only="peaks", dpi=60) == [drawn[2], drawn[5]]
    with Image.open(drawn[2]) as picture:
        assert picture.size == (450, 312)


def test_unknown_kinds_and_missing_records_are_refused(tmp_path):
    with pytest.raises(InputError, match="no figure is called 'movie'; known: record_section, peaks, wavefield, ground"):
        draw(tmp_path, only="movie")
    with pytest.raises(StorageError, match="no records in"):
        draw(tmp_path)


def test_a_figures_folder_that_cannot_be_written_is_named(tmp_path):
    write_records(tmp_path)
    (tmp_path / "figures").write_text("in the way")
    with pytest.raises(StorageError, match=f"writing the figures failed at {tmp_path / 'figures'}: a part of this path"):
        draw(tmp_path)


def test_names_that_file_names_cannot_hold_stay_apart(tmp_path):
    lines = [ReceiverLine(name, np.array([1.0, 2.0]), np.zeros(2), np.zeros(2)) for name in ("a b", "a_b")]
    with RecordsWriter(tmp_path, lines, None, {}, {}) as writer:
        for line in lines:
            writer.put_seismograms(line.name, np.arange(9.0), {"displacement_z": np.ones((2, 9))})
        writer.finish(complete=True)
    names = [path.name for path in draw(tmp_path, dpi=40)]
    assert names == ["record_section_a_b_displacement_z.png", "record_section_a_b__displacement_z.png"]


def test_record_section_axes_and_words(flat):
    figure = draw_record_section(flat, "street", "velocity_z")
    (axes,) = figure.axes
    assert (axes.get_xlabel(), axes.get_ylabel()) == ("x (m)", "time (s)")
    bottom, top = axes.get_ylim()
    assert bottom > top == 0.0  # time runs downward
    assert "Pile driving beside a clinic" in figure.get_suptitle()
    assert any(text.get_text() == "street: vertical particle velocity" for text in figure.texts)
    assert "scaled to its own peak; the greatest of them is 1.5 mm/s" in caption(figure)
    assert "Deflection to the right: motion downward." in caption(figure)


def test_traces_stand_at_their_receivers_and_bend_right_for_positive_motion(flat):
    line = flat.seismograms["street"]
    (axes,) = draw_record_section(flat, "street", "velocity_z").axes
    (wiggles,) = [c for c in axes.collections if isinstance(c, LineCollection)]
    curves = np.array(wiggles.get_segments())
    assert_allclose(curves[:, 0, 0], line.x, rtol=0, atol=1e-6)
    assert_allclose(curves[0, :, 1], line.time, rtol=0, atol=1e-12)
    bend = curves[:, :, 0] - line.x[:, None]
    assert_allclose(np.abs(bend).max(axis=1), 6.0, rtol=1e-9, atol=0)  # 1.2 gaps of 5 m, each to its own peak
    assert_allclose(bend[3] / 6.0, line.velocity_z[3] / np.abs(line.velocity_z[3]).max(), rtol=0, atol=1e-9)


def test_common_gain_keeps_the_ratio_between_traces(flat):
    line = flat.seismograms["street"]
    figure = draw_record_section(flat, "street", "velocity_z", common_gain=True)
    (wiggles,) = [c for c in figure.axes[0].collections if isinstance(c, LineCollection)]
    widths = np.abs(np.array(wiggles.get_segments())[:, :, 0] - line.x[:, None]).max(axis=1)
    peaks = np.abs(line.velocity_z).max(axis=1)
    assert_allclose(widths / widths[0], peaks / peaks[0], rtol=1e-9, atol=0)
    assert caption(figure).startswith("All traces to one scale; the widest deflection is 1.5 mm/s.")


def test_guides_run_at_their_speeds_from_the_source(flat):
    (axes,) = draw_record_section(flat, "street", "velocity_z").axes
    labels = [text.get_text() for text in axes.get_legend().get_texts()]
    assert labels == ["direct P, 400 m/s", "direct S, 170 m/s", "direct Rayleigh, 150 m/s"]
    for guide, speed in zip(axes.get_lines(), SPEEDS.values(), strict=True):
        x, time = guide.get_xdata(), guide.get_ydata()
        assert_allclose(time, 0.05 + np.abs(x - SOURCE_X) / speed, rtol=0, atol=1e-12)
    # and the strong pulse of the synthetic records lies on the Rayleigh guide
    line = flat.seismograms["street"]
    arrival = line.time[np.abs(line.velocity_z).argmax(axis=1)]
    assert_allclose(arrival, np.interp(line.x, x, time), rtol=0, atol=1e-3)


def test_a_borehole_is_drawn_by_depth_without_guides(flat):
    (axes,) = draw_record_section(flat, "clinic borehole", "velocity_x").axes
    assert axes.get_xlabel() == "depth below the surface (m)"
    assert axes.get_legend() is None
    (axes,) = draw_peaks(flat, "clinic borehole").axes
    assert axes.get_xlabel() == "depth below the surface (m)"


def test_silent_and_faint_traces_are_not_blown_up():
    line = ReceiverLine("row", np.arange(3.0), np.zeros(3), np.zeros(3))
    traces = np.array([1.0, 1e-7, 0.0])[:, None] * np.sin(np.arange(50.0))
    with RecordsWriter(None, [line], None, {}, {}) as writer:
        writer.put_seismograms("row", np.arange(50.0), {"velocity_x": traces, "velocity_z": np.zeros((3, 50))})
        writer.finish(complete=True)
        records = writer.records()
    figure = draw_record_section(records, "row", "velocity_x")
    (wiggles,) = [c for c in figure.axes[0].collections if isinstance(c, LineCollection)]
    widths = np.ptp(np.array(wiggles.get_segments())[:, :, 0], axis=1)
    assert widths[1] < 0.01 * widths[0]
    assert widths[2] == 0.0
    assert "Traces below 0.0001 of it stay small." in caption(figure)
    draw_record_section(records, "row", "velocity_z").savefig("/dev/null", format="png")


def test_wavefield_panels(flat):
    figure = draw_wavefield(flat, "velocity_z")
    *panels, bar = figure.axes
    assert [axes.get_title(loc="left") for axes in panels] == [
        "t = 0.150 s", "t = 0.350 s", "t = 0.500 s", "t = 0.650 s", "t = 0.850 s", "t = 1.000 s",
    ]  # fmt: skip
    assert bar.get_xlabel() == "vertical particle velocity, positive downward (mm/s)"
    for axes in panels:
        assert axes.get_aspect() == 1.0
        bottom, top = axes.get_ylim()
        assert (bottom, top) == (60.0, 0.0)  # depth runs downward
        norm = axes.images[0].norm
        assert norm.vmin == -norm.vmax < 0.0
        assert_allclose(axes.images[0].get_extent(), (-0.5, 240.5, 60.5, -0.5), rtol=0, atol=1e-12)
    assert panels[0].get_ylabel() == "depth (m)"
    assert panels[-1].get_xlabel() == "x (m)"
    shown = panels[2].images[0].get_array()
    assert_allclose(shown, flat.snapshots.frame("velocity_z", 10) * 1e3, rtol=1e-6, atol=0)
    norm = panels[0].images[0].norm
    assert f"Colours end at ±{norm.vmax:.3g} mm/s" in caption(figure)


def test_wavefield_over_a_hill_stands_where_the_nodes_are():
    """A field that is the elevation itself must be drawn as the height on the axis, to half a row."""
    x, z = np.arange(0.0, 101.0, 2.0), np.arange(0.0, 41.0, 2.0)
    hill = 10.0 * np.exp(-(((x - 50.0) / 20.0) ** 2))
    elevation = hill * (1.0 - z[:, None] / 40.0) - z[:, None]
    with RecordsWriter(None, [], SnapshotFrame(("stress_xx",), x, z, elevation), {}, {}) as writer:
        writer.add_snapshot(0.1, {"stress_xx": elevation})
        writer.finish(complete=True)
        figure = draw_wavefield(writer.records(), "stress_xx")
    axes = figure.axes[0]
    image = axes.images[0]
    _, _, bottom, top = image.get_extent()
    rows = np.linspace(top, bottom, image.get_array().shape[0])
    below = rows[:, None] <= hill
    error = np.abs(image.get_array() * display_scale(40.0, "Pa")[0] - rows[:, None])[below]
    assert error.max() < 1e-5  # single precision of what is stored; linear between nodes
    assert axes.get_ylabel() == "elevation (m)"
    low, high = axes.get_ylim()
    assert low == -40.0 and 10.0 < high < 13.0


def test_incomplete_runs_are_marked_on_every_figure(curved, flat):
    for make in (
        lambda r: draw_record_section(r, "street", "velocity_z"),
        lambda r: draw_peaks(r, "street"),
        lambda r: draw_wavefield(r, "velocity_x"),
        draw_ground,
    ):
        assert "INCOMPLETE RUN" in caption(make(curved))
        assert "INCOMPLETE" not in caption(make(flat))


def test_marks_stand_on_the_hill(curved):
    axes = draw_ground(curved).axes[0]
    receivers, source = axes.collections[-2:]
    street = curved.seismograms["street"].x
    places = receivers.get_offsets()[: len(street)]
    assert_allclose(places, np.column_stack([street, terrain(street)]), rtol=0, atol=1e-9)
    assert_allclose(source.get_offsets(), [[SOURCE_X, terrain(np.array(SOURCE_X))]], rtol=0, atol=1e-9)


def test_ground_panels_and_their_units(flat):
    figure = draw_ground(flat)
    titles = [axes.get_title(loc="left") for axes in figure.axes if axes.get_title(loc="left")]
    assert titles == [
        "P-wave speed (m/s)", "S-wave speed (m/s)", "density (kg/m³)", "quality factor of S waves",
        "nodes per shortest wavelength",
    ]  # fmt: skip
    assert_allclose(figure.axes[1].images[0].get_array(), flat.ground.vs, rtol=0, atol=0)
    assert figure.axes[0].get_aspect() == 1.0
    assert "Grey: no finite value (a quality factor there: elastic)." in caption(figure)
    assert draw_ground(flat, equal=False).axes[0].get_aspect() == "auto"


def test_peaks_against_distance(flat):
    figure = draw_peaks(flat, "street")
    (axes,) = figure.axes
    assert axes.get_xlabel() == "horizontal distance from pile (m)"
    assert axes.get_ylabel() == "peak particle velocity (mm/s)"
    assert (axes.get_xscale(), axes.get_yscale()) == ("log", "log")
    line = flat.seismograms["street"]
    resultant, vertical, horizontal = axes.get_lines()
    assert_allclose(vertical.get_xdata(), line.x - SOURCE_X, rtol=0, atol=1e-12)
    assert_allclose(vertical.get_ydata(), 1e3 * np.abs(line.velocity_z).max(axis=1), rtol=1e-12, atol=0)
    assert_allclose(horizontal.get_ydata(), 1e3 * np.abs(line.velocity_x).max(axis=1), rtol=1e-12, atol=0)
    assert np.all(resultant.get_ydata() >= vertical.get_ydata())


def test_figures_that_the_records_do_not_allow_say_why():
    line = ReceiverLine("row", np.arange(3.0), np.zeros(3), np.zeros(3))
    with RecordsWriter(None, [line], None, {}, {}) as writer:
        writer.put_seismograms("row", np.arange(5.0), {"displacement_x": np.zeros((3, 5))})
        writer.finish(complete=True)
        records = writer.records()
    with pytest.raises(InputError, match="these records hold no snapshots"):
        draw_wavefield(records, "velocity_x")
    with pytest.raises(InputError, match="these records hold no ground properties"):
        draw_ground(records)
    with pytest.raises(InputError, match="peak velocities of 'row' need velocity_x and velocity_z"):
        draw_peaks(records, "row")


@pytest.mark.parametrize(
    ("peak", "units", "expected"),
    [
        (2.5, "m s-1", (1.0, "m/s")), (3e-2, "m s-1", (1e-3, "mm/s")), (2e-5, "m s-1", (1e-3, "mm/s")),
        (4e-7, "m s-1", (1e-6, "µm/s")), (3e-9, "m", (1e-9, "nm")), (5e4, "Pa", (1e3, "kPa")),
        (0.0, "m s-1", (1.0, "m/s")), (7.0, "kg m-3", (1.0, "kg/m³")),
    ],
)  # fmt: skip
def test_units_for_people(peak, units, expected):
    assert display_scale(peak, units) == expected
