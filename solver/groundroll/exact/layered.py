"""Line sources in a stack of layers over a half-space: frequency-wavenumber solution, exact but for its quadrature.

Each frequency is a sum over wavenumbers of a line that repeats every `span` metres (Bouchon & Aki 1977, BSSA 67:259;
Bouchon 1979), long enough that no image arrives in the window. Stack by Kennett (1983). At large k the kernel falls
only as 1/k when source and receiver share a depth; there the sum is closed by a smooth end of width 75/r (r: least
distance of a receiver from the source), which amounts to spreading the source over r/75 by a bell, and changes
nothing outside it: its share is exp(-(75/8.5)²/4) = 4e-9.
"""

import numpy as np

from groundroll.errors import InputError

from .media import complex_moduli, complex_speeds
from .stack import Stack
from .transform import band_of, smooth_end
from .wavebasis import Waves

END_WIDTH = 75.0
BLOCK = 4096
PARITY = np.array([[False, True], [True, False]])  # component is even in k: rows (ux, uz), columns source classes


def seismograms(layers, source, receivers, pulse, times, *, quantity="velocity",
                reference_frequency=10.0, law="kjartansson"):
    """Traces (x component, z component), each (receiver, time), in m/s (or m, m/s²); z is down.

    layers: from the top, the last with thickness inf; source: LineSource, depth 0 meaning on the free surface;
    receivers (receiver, 2): x, depth in m; pulse, times: see transform.band_of.
    reference_frequency (Hz) is where vp and vs hold if qp or qs are finite; law: a key of media.LAWS.
    """
    band = band_of(pulse, times)
    span = _span(layers, source, receivers, band, reference_frequency, law)
    response = displacement(layers, source, receivers, band.omega, span, reference_frequency, law)
    return band.traces(response[:, 0], quantity), band.traces(response[:, 1], quantity)


def displacement(layers, source, receivers, omega, span, reference_frequency=10.0, law="kjartansson"):
    """Displacement (receiver, 2, frequency), m·s per unit pulse spectrum, of the line repeated every `span` m.

    omega: complex rad/s with Im < 0. InputError for a stack that does not end in a half-space, a source or receiver in
    the air, a receiver on the source, a moment on an interface.
    """
    receivers = np.asarray(receivers, dtype=float).reshape(-1, 2)
    _check(layers, source, receivers)
    heights, owners, source_level, levels = _parts(layers, source.depth, receivers[:, 1])
    moduli = [complex_moduli(layer, omega, reference_frequency, law) for layer in layers]
    distance = receivers[:, 0] - source.x
    radius = np.hypot(distance, receivers[:, 1] - source.depth).min()
    start, end = _ends(layers, omega, radius, reference_frequency, law)
    step = 2 * np.pi / span
    result = np.zeros((len(receivers), 2, len(omega)), dtype=complex)
    for first in range(0, int(np.ceil(end.max() / step)), BLOCK):
        k_block = step * (first + 0.5 + np.arange(BLOCK))
        phase = k_block * distance[:, None]
        cosine, sine = np.cos(phase), np.sin(phase)
        for n in np.nonzero(end > k_block[0])[0]:
            k = k_block[k_block < end[n]]
            waves = [Waves(p[n], s[n], layer.density, omega[n], k) for layer, (p, s) in zip(layers, moduli)]
            stack = Stack([waves[o] for o in owners], heights)
            jumps = _jumps(source, waves[owners[source_level]])
            motion = stack.motion(source_level, *jumps, set(levels))
            weight = smooth_end(k, start[n], end[n]) * (2 / span)
            for level in set(levels):
                rows = np.nonzero(levels == level)[0]
                field = motion[level] * weight
                even = np.where(PARITY[..., None], field, 0).sum(1)
                odd = np.where(PARITY[..., None], 0, field).sum(1)
                m = len(k)
                result[rows, :, n] += cosine[rows, :m] @ even.T - 1j * (sine[rows, :m] @ odd.T)
    return result


def _jumps(source, waves):
    """Jumps of motion and traction across the source, (2, 2, n): columns the two symmetry classes.

    From dy/dz = A y - f: a moment's delta'(z) part adds A (0, 0, Mxz, Mzz). Class 0 is (Fz, Mxx, Mzz), where uz is even
    in k; class 1 is (Fx, Mxz), where ux is.
    """
    (fx, fz), (mxx, mzz, mxz) = source.force, source.moment
    motion = np.zeros((2, 2, len(waves.k)), dtype=complex)
    traction = np.zeros_like(motion)
    motion[1, 0] = mzz / waves.p_modulus
    motion[0, 1] = mxz / waves.mu
    ratio = 1 - 2 * waves.mu / waves.p_modulus
    traction[0, 0] = 1j * waves.k * (ratio * mzz - mxx)
    traction[1, 0] = -fz
    traction[0, 1] = -fx
    return motion, traction


def _parts(layers, source_depth, receiver_depths):
    """Heights and owning layers of the parts cut by interfaces, source and receivers; the levels of both."""
    tops = np.concatenate([[0.0], np.cumsum([layer.thickness for layer in layers[:-1]])])
    depths = np.unique(np.concatenate([tops, [source_depth], receiver_depths]))
    heights = np.append(np.diff(depths), np.inf)
    owners = np.searchsorted(tops, depths, side="right") - 1
    return heights, owners, int(np.searchsorted(depths, source_depth)), np.searchsorted(depths, receiver_depths)


def _ends(layers, omega, radius, reference_frequency, law):
    """Where the sum over k starts to fade and where it stops, (frequency,) each, rad/m."""
    slowness = max((1 / complex_speeds(layer, omega, reference_frequency, law)[1]).real.max() for layer in layers)
    start = 1.4 * np.abs(omega) * slowness
    return start, start + END_WIDTH / radius


def _span(layers, source, receivers, band, reference_frequency, law):
    """A repeat length (m) whose nearest image is still on its way when the window ends."""
    slowness = min((1 / complex_speeds(layer, band.omega, reference_frequency, law)[0]).real.min() for layer in layers)
    reach = np.abs(np.asarray(receivers, dtype=float).reshape(-1, 2)[:, 0] - source.x).max()
    return reach + 1.1 * band.count * band.stride * band.step / slowness


def _check(layers, source, receivers):
    thickness = np.array([layer.thickness for layer in layers])
    if not len(layers) or not np.isinf(thickness[-1]) or np.any(np.isinf(thickness[:-1])):
        raise InputError("The last layer, and no other, must have thickness inf.")
    if source.depth < 0 or np.any(receivers[:, 1] < 0):
        raise InputError("Depths of source and receivers must be 0 or more.")
    if np.any((receivers[:, 0] == source.x) & (receivers[:, 1] == source.depth)):
        raise InputError("A receiver sits on the line source, where motion is infinite; move it.")
    if any(source.moment) and np.any(np.cumsum(thickness[:-1]) == source.depth):
        raise InputError(f"A moment at depth {source.depth} m sits on an interface; move it into a layer.")
