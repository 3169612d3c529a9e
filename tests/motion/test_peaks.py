"""Peaks against closed forms."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.motion.peaks import peak_motion


def ricker(time, frequency, delay):
    a = (np.pi * frequency * (time - delay)) ** 2
    return (1.0 - 2.0 * a) * np.exp(-a)


def test_peaks_and_times_of_two_pulses():
    """A Ricker pulse has its peak 1 at its delay; its side lobes reach -0.446260 at 0.389848/f0 (closed form)."""
    time = 1e-4 * np.arange(4000)
    horizontal = np.stack([-3.0 * ricker(time, 20.0, 0.1), 0.5 * ricker(time, 20.0, 0.3)])
    vertical = np.stack([4.0 * ricker(time, 20.0, 0.2), ricker(time, 20.0, 0.3)])
    peaks = peak_motion(time, horizontal, vertical)
    assert_allclose(peaks.horizontal, [3.0, 0.5], rtol=1e-12, atol=0)
    assert_allclose(peaks.vertical, [4.0, 1.0], rtol=1e-12, atol=0)
    assert_allclose(peaks.horizontal_time, [0.1, 0.3], rtol=0, atol=1e-12)
    # apart in time the pulses do not add: 3 and 4 would be 5 if the peaks were squared and summed
    assert_allclose(peaks.resultant, [4.0, np.hypot(0.5, 1.0)], rtol=1e-9, atol=0)
    assert_allclose(peaks.resultant_time, [0.2, 0.3], rtol=0, atol=1e-12)


def test_side_lobe_is_the_peak_once_the_main_lobe_is_cut_off():
    """0.446260 at 0.389848/f0 after the main peak (closed form, Ricker pulse); sampled 2500 times a period."""
    time = 0.1 + 0.25 / 20.0 + np.arange(2000) * 2e-5
    pulse = ricker(time, 20.0, 0.1)
    peaks = peak_motion(time, pulse, np.zeros_like(pulse))
    assert_allclose(peaks.horizontal, [0.446260], rtol=0, atol=1e-6)
    assert_allclose(peaks.horizontal_time, [0.1 + 0.389848 / 20.0], rtol=0, atol=1e-5)


def test_resultant_of_circular_motion_is_the_radius():
    angle = np.linspace(0.0, 2.0 * np.pi, 73)
    peaks = peak_motion(angle, 2.0 * np.cos(angle), 2.0 * np.sin(angle))
    assert_allclose(peaks.resultant, [2.0], rtol=1e-14, atol=0)


def test_in_phase_motion_adds_by_the_root_of_squares():
    time = np.linspace(0.0, 1.0, 101)
    swing = np.sin(np.pi * time)
    peaks = peak_motion(time, 3.0 * swing, -4.0 * swing)
    assert_allclose(peaks.resultant, [5.0], rtol=1e-14, atol=0)


def test_sampling_loss_is_within_what_is_stated():
    """The sample nearest to a crest is at most half an interval away: cos(π/n) of the true peak."""
    n = 20
    phase = (np.arange(5 * n) + 0.5) * 2.0 * np.pi / n
    peaks = peak_motion(phase, np.cos(phase), np.zeros_like(phase))
    assert_allclose(peaks.horizontal, [np.cos(np.pi / n)], rtol=1e-12, atol=0)
    assert 1.0 - peaks.horizontal[0] < 0.0124


def test_shapes_that_differ_are_refused():
    with pytest.raises(InputError, match="both components at the same instants"):
        peak_motion(np.arange(4.0), np.zeros((2, 4)), np.zeros((2, 5)))
    with pytest.raises(InputError, match="both components at the same instants"):
        peak_motion(np.arange(0.0), np.zeros((2, 0)), np.zeros((2, 0)))
