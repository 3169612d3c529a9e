"""How far one record is from another, as one number."""

import numpy as np

from groundroll.errors import InputError


def relative_misfit(record: np.ndarray, reference: np.ndarray) -> float:
    """√(Σ (record - reference)² / Σ reference²) over all traces (…, time) on the same instants from t = 0.

    Where one is shorter in time, the rest of it counts as zero. 0 for two silent records, infinite for
    motion against a silent reference. Not symmetric: the second one is what is taken as right.

    Raises InputError if the records have different receivers.
    """
    return float(_ratio(*_energies(record, reference, axis=None)))


def misfit_by_receiver(record: np.ndarray, reference: np.ndarray) -> np.ndarray:
    """The same for each trace by itself: (receiver, time) in, (receiver,) out."""
    return _ratio(*_energies(record, reference, axis=-1))


def _energies(record: np.ndarray, reference: np.ndarray, axis: int | None) -> tuple[np.ndarray, np.ndarray]:
    record, reference = np.asarray(record, "f8"), np.asarray(reference, "f8")
    if record.shape[:-1] != reference.shape[:-1]:
        raise InputError(
            f"records of different receivers cannot be compared: {record.shape[:-1]} against {reference.shape[:-1]}"
        )
    length = max(record.shape[-1], reference.shape[-1])
    record, reference = _lengthen(record, length), _lengthen(reference, length)
    return ((record - reference) ** 2).sum(axis=axis), (reference**2).sum(axis=axis)


def _lengthen(values: np.ndarray, length: int) -> np.ndarray:
    return np.pad(values, [(0, 0)] * (values.ndim - 1) + [(0, length - values.shape[-1])])


def _ratio(difference: np.ndarray, size: np.ndarray) -> np.ndarray:
    difference, size = np.sqrt(difference), np.sqrt(size)
    silent = np.where(difference == 0.0, 0.0, np.inf)
    return np.where(size == 0.0, silent, difference / np.where(size == 0.0, 1.0, size))
