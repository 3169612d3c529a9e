"""The law of expected errors: monotone, its table met, its inverse right."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.running.error_law import GROWTH, MOST_POINTS, NEAR, POINTS, expected_misfit, needed_points

FINE = np.arange(3.0, 20.0, 0.1)


@pytest.mark.parametrize("wavelengths", [0.5, 1.0, 6.0, 20.0, 100.0])
def test_more_points_never_err_more(wavelengths):
    errors = [expected_misfit(p, wavelengths) for p in FINE]
    assert (np.diff(errors) < 0.0).all()


@pytest.mark.parametrize("points", [5.0, 6.5, 10.0])
def test_the_growth_with_distance_is_that_of_the_table(points):
    far = [expected_misfit(points, n) for n in (10.0, 20.0, 40.0)]
    assert far[0] < far[1] < far[2]
    assert_allclose(far[2] - far[1], 2.0 * (far[1] - far[0]), rtol=1e-9, atol=0)


@pytest.mark.parametrize("j", range(len(POINTS)))
def test_measured_points_are_met(j):
    assert_allclose(expected_misfit(POINTS[j], 20.0), NEAR[j] + 20.0 * GROWTH[j], rtol=1e-12, atol=0)


def test_the_table_falls():
    assert (np.diff(POINTS) > 0).all() and (np.diff(NEAR) < 0).all() and (np.diff(GROWTH) < 0).all()


@pytest.mark.parametrize("wavelengths", [2.0, 10.0, 20.0])
@pytest.mark.parametrize("misfit", [0.008, 0.01, 0.03])
def test_needed_points_are_the_least_that_serve(misfit, wavelengths):
    points = needed_points(misfit, wavelengths)
    assert 5.0 <= points < MOST_POINTS
    assert expected_misfit(points, wavelengths) <= misfit
    if points > 5.0:
        assert expected_misfit(points - 0.1, wavelengths) > misfit


def test_beyond_reach_the_most_points_are_taken():
    assert needed_points(1e-4, 50.0) == MOST_POINTS
    assert expected_misfit(MOST_POINTS, 50.0) > 1e-4
