import numpy as np
import pytest


def _ricker(frequency, delay):
    def pulse(t):
        a = (np.pi * frequency * (t - delay)) ** 2
        return (1 - 2 * a) * np.exp(-a)

    return pulse


def _misfit(found, truth):
    """Relative L2 misfit of both components together, one number a receiver."""
    error = sum(np.sum((f - t) ** 2, axis=1) for f, t in zip(found, truth))
    return np.sqrt(error / sum(np.sum(t**2, axis=1) for t in truth))


@pytest.fixture
def ricker():
    return _ricker


@pytest.fixture
def misfit():
    return _misfit
