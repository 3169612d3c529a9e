"""Misfits against closed forms."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.motion.misfit import misfit_by_receiver, relative_misfit

PHASE = 2.0 * np.pi * np.arange(400) / 40.0  # ten whole periods


def test_a_scaled_record_is_off_by_its_factor():
    reference = np.sin(PHASE)[None, :]
    assert_allclose(relative_misfit(1.03 * reference, reference), 0.03, rtol=1e-12, atol=0)
    assert_allclose(relative_misfit(reference, 1.03 * reference), 0.03 / 1.03, rtol=1e-12, atol=0)


@pytest.mark.parametrize("shift", [0.01, 0.5, np.pi])
def test_a_shifted_sine_is_off_by_twice_the_sine_of_half_the_phase(shift):
    misfit = relative_misfit(np.sin(PHASE + shift), np.sin(PHASE))
    assert_allclose(misfit, 2.0 * np.sin(shift / 2.0), rtol=1e-10, atol=0)


def test_what_one_record_lacks_at_its_end_counts_as_zero():
    """Half of the energy missing: √(1/2), whichever way round the missing half lies in the record."""
    reference = np.sin(PHASE)[None, :]
    assert_allclose(relative_misfit(reference[:, :200], reference), np.sqrt(0.5), rtol=1e-12, atol=0)
    assert_allclose(relative_misfit(reference, reference[:, :200]), 1.0, rtol=1e-12, atol=0)


def test_receivers_are_weighed_by_their_energy_together_and_equally_apart():
    reference = np.stack([3.0 * np.sin(PHASE), np.sin(PHASE)])
    record = np.stack([3.0 * np.sin(PHASE), 1.5 * np.sin(PHASE)])
    assert_allclose(misfit_by_receiver(record, reference), [0.0, 0.5], rtol=0, atol=1e-12)
    assert_allclose(relative_misfit(record, reference), 0.5 / np.sqrt(10.0), rtol=1e-12, atol=0)


def test_silence():
    still, moving = np.zeros((2, 9)), np.ones((2, 9))
    assert relative_misfit(still, still) == 0.0
    assert relative_misfit(moving, still) == np.inf
    assert relative_misfit(still, moving) == 1.0


def test_different_receivers_are_refused():
    with pytest.raises(InputError, match=r"\(2,\) against \(3,\)"):
        relative_misfit(np.zeros((2, 9)), np.zeros((3, 9)))
