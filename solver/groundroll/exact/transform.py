"""Between time and complex frequency: the pulse's spectrum, and traces from spectra.

Forward F(omega) = integral f exp(-i omega t) dt at omega = 2 pi f - i decay, so the damped trace
f exp(-decay t) is what is sampled in frequency; the inverse multiplies by exp(+decay t). What would wrap
around from one period later is thereby scaled by exp(-decay period) = 2e-8 (e.g. Bouchon 1979, BSSA 69:1).
"""

from dataclasses import dataclass

import numpy as np
from scipy.fft import next_fast_len
from scipy.special import erfc

from groundroll.errors import InputError

DAMPING = 18.0        # decay times period
PADDING = 1.5         # period over window
KEPT = 1e-6           # spectrum below this share of its peak is let go
TAPER = 1.3           # the band ends at this multiple of the last kept frequency
FINE_AT_END = 1e-5     # sampling is not refined further once the band ends with less than this share,
ALLOWED_AT_END = 1e-4  # and refused if more than this is left at the finest
FINEST = 16           # samples per sample asked for


@dataclass(frozen=True)
class Band:
    """Frequencies at which a solution is wanted and the pulse's spectrum there.

    omega (frequency,), complex rad/s; spectrum (frequency,), of the dimensionless pulse, s.
    """

    omega: np.ndarray
    spectrum: np.ndarray
    decay: float
    step: float
    samples: int
    stride: int
    count: int

    def traces(self, response, quantity="velocity"):
        """Traces (receiver, time) from a displacement response (receiver, frequency) to a unit pulse spectrum."""
        power = {"displacement": 0, "velocity": 1, "acceleration": 2}.get(quantity)
        if power is None:
            raise InputError(f'quantity = "{quantity}" is not one of displacement, velocity, acceleration.')
        full = np.zeros((len(response), self.samples // 2 + 1), dtype=complex)
        full[:, : len(self.omega)] = response * self.spectrum * (1j * self.omega) ** power
        damped = np.fft.irfft(full, self.samples, axis=1)[:, :: self.stride][:, : self.count] / self.step
        return damped * np.exp(self.decay * self.step * self.stride * np.arange(self.count))


def smooth_end(value, start, end):
    """Falls from 1 at `start` to 0 at `end` as an error function (1e-9 off at both ends)."""
    middle, half = (start + end) / 2, (end - start) / 2
    return 0.5 * erfc(4.24 * (value - middle) / half)


def check_times(times):
    """The sampling interval of `times`, which must be 0, dt, 2 dt, ..."""
    times = np.asarray(times, dtype=float)
    if times.ndim != 1 or len(times) < 2 or times[0] != 0 or times[1] <= 0:
        raise InputError("Times must be 0, dt, 2 dt, ... with at least two samples.")
    if not np.allclose(times, times[1] * np.arange(len(times)), rtol=0, atol=1e-6 * times[1]):
        raise InputError("Times must be evenly spaced.")
    return float(times[1])


def band_of(pulse, times):
    """The band that a pulse fills.

    pulse: callable s(t), taking and giving arrays, or samples (time,) at `times` (held at the last value
    beyond them). A callable is sampled as finely as its spectrum needs, at most 16 times finer than `times`; it
    counts from t = 0, so one that does not start near 0 makes a jump there, which needs a broad band and costs time.
    Raises InputError where the pulse still carries over 1e-4 of its peak spectrum at the end of the band.
    """
    interval = check_times(times)
    count = len(times)
    padded = next_fast_len(int(np.ceil(PADDING * count)) + 16, real=True)
    decay = DAMPING / (padded * interval)
    stride = 1
    while True:
        spectrum, omega = _spectrum(pulse, count, padded * stride, interval / stride, decay)
        size = np.abs(spectrum) / np.abs(spectrum).max()
        last = max(min(np.nonzero(size > KEPT)[0][-1], int((len(size) - 1) / TAPER)), 4)
        left = size[last:].max()
        if left < FINE_AT_END or stride == FINEST or not callable(pulse):
            break
        stride *= 2
    if left > ALLOWED_AT_END:
        raise InputError(
            f"The pulse still carries {left:.1e} of its peak spectrum at {omega[last] / 2 / np.pi:.0f} Hz; "
            f"give a smoother pulse or a shorter time step than {interval:g} s."
        )
    end = min(int(TAPER * last) + 2, len(size))
    bins = np.arange(end)
    taper = smooth_end(bins, last, end)
    return Band(omega[:end] - 1j * decay, spectrum[:end] * taper, decay, interval / stride,
                padded * stride, stride, count)


def _spectrum(pulse, count, samples, step, decay):
    time = step * np.arange(samples)
    if callable(pulse):
        values = np.array(pulse(time), dtype=float)
    else:
        values = np.asarray(pulse, dtype=float)
        if values.shape != (count,):
            raise InputError(f"The pulse has shape {values.shape}; {(count,)}, the shape of the times, is needed.")
        values = np.concatenate([values, np.full(samples - count, values[-1])])
    if not np.any(values):
        raise InputError("The pulse is zero throughout.")
    values[0] *= 0.5
    spectrum = np.fft.rfft(values * np.exp(-decay * time)) * step
    return spectrum, 2 * np.pi * np.fft.rfftfreq(samples, step)
