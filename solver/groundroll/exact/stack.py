"""Waves through a stack of layers by reflection and transmission matrices (Kennett 1983, Seismic Wave Propagation).

Levels 0, 1, ... are depths: surface, interfaces, source, receivers. Part i lies between level i and i + 1; the last
part goes on down. Only decaying exponentials occur, so any thickness and frequency is safe.
"""

import numpy as np

from .wavebasis import inverse, times


class Stack:
    """waves: one Waves per part (the same object where the ground does not change); heights: (part,) m."""

    def __init__(self, waves, heights):
        self.waves = waves
        self.decays = [w.decay(h) for w, h in zip(waves, heights[:-1])]
        self.identity = np.zeros((2, 2, len(waves[0].k)), dtype=complex)
        self.identity[0, 0] = self.identity[1, 1] = 1

    def _through(self, i, reflection):
        """Reflection seen across part i."""
        e = self.decays[i]
        return e * reflection * e[:, 0]

    def from_above(self, lowest):
        """For parts 0..lowest: reflection of upgoing waves at each part's top, and transmission out of that top."""
        reflections, passes = [self.waves[0].free_surface()], [None]
        for i in range(lowest):
            upper, lower = self.waves[i], self.waves[i + 1]
            seen, through = self._through(i, reflections[i]), None
            if upper is not lower:
                d, u = lower.split(upper.motion(seen, self.identity), upper.traction(seen, self.identity))
                through = inverse(u)
                seen = times(d, through)
            reflections.append(seen)
            passes.append(through)
        return reflections, passes

    def from_below(self, highest):
        """By part, highest..last: reflection of downgoing waves at each part's bottom, and transmission out of it."""
        last = len(self.waves) - 1
        reflections, passes = {last: 0 * self.identity}, {}
        for i in range(last - 1, highest - 1, -1):
            upper, lower = self.waves[i], self.waves[i + 1]
            seen, through = reflections[i + 1], None
            if i + 1 < last:
                seen = self._through(i + 1, seen)
            if upper is not lower:
                d, u = upper.split(lower.motion(self.identity, seen), lower.traction(self.identity, seen))
                through = inverse(d)
                seen = times(u, through)
            reflections[i], passes[i] = seen, through
        return reflections, passes

    def motion(self, level, jump_motion, jump_traction, wanted):
        """Displacement (2, column, n) at each wanted level.

        A source at `level` makes motion and traction jump by the given amounts (2, column, n), downwards.
        """
        above, out_up = self.from_above(level)
        below, out_down = self.from_below(level)
        last = len(self.waves) - 1
        d, u = self.waves[level].split(jump_motion, jump_traction)
        r_up = above[level]
        r_down = below[level] if level == last else self._through(level, below[level])
        rising = times(inverse(self.identity - times(r_down, r_up)), times(r_down, d) - u)
        result = self._rise(level, rising, above, out_up, wanted)
        result.update(self._sink(level, times(r_up, rising) + d, below, out_down, wanted))
        return result

    def _rise(self, level, rising, above, out_up, wanted):
        result = {}
        for i in range(level, min(wanted) - 1, -1):
            if i in wanted:
                wave = self.waves[i]
                result[i] = wave.motion(times(above[i], rising), rising) if i else wave.surface_motion(rising)
            if i > 0:
                rising = rising if out_up[i] is None else times(out_up[i], rising)
                rising = self.decays[i - 1] * rising
        return result

    def _sink(self, level, sinking, below, out_down, wanted):
        result = {}
        for i in range(level, max(wanted)):
            sinking = self.decays[i] * sinking
            if i + 1 in wanted:
                result[i + 1] = self.waves[i].motion(sinking, times(below[i], sinking))
            passed = out_down[i]
            sinking = sinking if passed is None else times(passed, sinking)
        return result
