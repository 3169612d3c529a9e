"""Time dispersion: removed exactly from the source pulse and from the records.

Leapfrog turns i omega into i (2/dt) sin(omega dt/2). A record's component at the scheme's angular
frequency omega_s is therefore the true response at  Omega = (2/dt) sin(omega_s dt/2). So the source
series takes at omega_s the pulse's spectrum at Omega, and the record at Omega takes the series' spectrum
at omega_s = (2/dt) asin(Omega dt/2). Exact for lossless media and any dt below the limit.
(Stork 2013, EAGE; Wang & Xu 2015, Geophysics 80, T201 (from memory); Koene, Robertsson, Broggini &
Andersson 2018, Geophys. J. Int. 213, 169.)
"""

import numpy as np

_BLOCK = 4_000_000
# Samples whose exponentials are formed one by one in a transform.
_STRETCH = 512


def scheme_frequency(true, dt):
    """Return omega_s = (2/dt) asin(Omega dt/2), Omega = `true` (rad/s), |Omega| <= 2/dt."""
    return 2.0 / dt * np.arcsin(0.5 * dt * true)


def _frequencies(span: float, top: float) -> tuple[np.ndarray, np.ndarray]:
    """Return angular frequencies from 0 to `top` (rad/s) spaced for a period `span`, and quadrature
    weights of (1/pi) Re integral S exp(i Omega t) dOmega."""
    step = 2.0 * np.pi / span
    omega = step * np.arange(int(np.ceil(top / step)) + 1)
    weight = np.full(len(omega), step / np.pi)
    weight[0] *= 0.5
    return omega, weight


def _blocks(n: int, width: int):
    size = max(1, _BLOCK // max(width, 1))
    return (slice(a, min(a + size, n)) for a in range(0, n, size))


def _waves(omega, times):
    return np.exp(1j * np.outer(omega, times))


def resynthesise(samples, times_in, omega_in, times_out, omega_out, weight, waves=_waves):
    """Return Re sum_k weight_k waves(omega_out_k, t) dt sum_n samples_n exp(-i omega_in_k t_n).

    `samples` (trace, n) at even `times_in`; result (trace, len(times_out)).
    """
    dt = times_in[1] - times_in[0]
    out = np.zeros((len(samples), len(times_out)))
    for block in _blocks(len(omega_in), max(_STRETCH, len(times_out))):
        spectrum = _spectrum(samples, times_in[0], dt, omega_in[block]) * (dt * weight[block])
        out += (spectrum @ waves(omega_out[block], times_out)).real
    return out


def _spectrum(samples, first, dt, omega):
    """Return sum_n samples_n exp(-i omega (first + n dt)), (trace, omega).

    With n = STRETCH m + r the sum over m is Horner's rule in exp(-i omega STRETCH dt): only STRETCH exponentials
    are formed for each omega, not one for each sample.
    """
    count, n = samples.shape
    stretches = -(-n // _STRETCH)
    padded = np.zeros((count, stretches * _STRETCH))
    padded[:, :n] = samples
    within = np.exp(-1j * np.outer(dt * np.arange(_STRETCH), omega))
    pair = np.hstack([within.real, within.imag])
    step = np.exp(-1j * dt * _STRETCH * omega)
    total = np.zeros((count, len(omega)), dtype=complex)
    for stretch in padded.reshape(count, stretches, _STRETCH).transpose(1, 0, 2)[::-1]:
        real, imaginary = np.hsplit(stretch @ pair, 2)
        total = total * step + real + 1j * imaginary
    return total * np.exp(-1j * first * omega)


def predistort(pulse, times_in, dt, steps, start=0.0, top=np.inf):
    """Return the source series, sampled at start + n dt (n < steps), of a pulse given at `times_in`.

    `pulse` (n,) is sampled at even times fine enough for its spectrum and zero outside them. The component at
    Omega of the pulse is laid at omega_s, up to the frequency `top` (Hz, fading out over its last quarter); what
    the pulse holds above is left as it is.
    """
    step_in = times_in[1] - times_in[0]
    times_out = start + dt * np.arange(steps)
    span = 2.0 * max(times_out[-1], times_in[-1]) + 64.0 * dt - 2.0 * min(start, times_in[0], 0.0)
    limit = min(np.pi / dt, np.pi / step_in, 2.0 * np.pi * top)
    omega_s, weight = _frequencies(span, limit)
    if 2.0 * np.pi * top <= limit:
        weight = weight * fade_out(omega_s, limit)
    omega = 2.0 / dt * np.sin(0.5 * dt * omega_s)
    moved, left = (resynthesise(pulse[None, :], times_in, w, times_out, omega_s, weight)[0] for w in (omega, omega_s))
    return np.interp(times_out, times_in, pulse, left=0.0, right=0.0) + moved - left


def fade_out(omega, end):
    """Return 1 below three quarters of `end`, falling smoothly to 0 there."""
    u = np.clip((omega / end - 0.75) / 0.25, 0.0, 1.0)
    return np.cos(0.5 * np.pi * u) ** 2


def correct(traces, dt, times_out, top, start=0.0, quantity="velocity"):
    """Return `traces` (trace, n) of velocity sampled at start + n dt freed of time dispersion, at `times_out`.

    `quantity` "acceleration" or "displacement" returns their derivative or their integral from t = 0, formed
    exactly from the same spectrum. Frequencies up to `top` (Hz) are kept, fading out over the last quarter; the
    last part of the record should be tapered by the caller if it does not end quietly.
    """
    times_in = start + dt * np.arange(traces.shape[1])
    span = 1.25 * (times_in[-1] - min(start, 0.0)) + 64.0 * dt
    end = min(2.0 * np.pi * top, 1.9 / dt)
    omega, weight = _frequencies(span, end)
    weight = weight * fade_out(omega, end)
    return resynthesise(traces, times_in, scheme_frequency(omega, dt), times_out, omega, weight, MOTION[quantity])


def _integral(omega, times):
    """Integral of exp(i omega t) from 0 to t, (omega, time)."""
    safe = np.where(omega == 0.0, 1.0, omega)[:, None]
    whole = (_waves(omega, times) - 1.0) / (1j * safe)
    return np.where(omega[:, None] == 0.0, times[None, :], whole)


MOTION = {
    "velocity": _waves,
    "acceleration": lambda omega, times: 1j * omega[:, None] * _waves(omega, times),
    "displacement": _integral,
}
