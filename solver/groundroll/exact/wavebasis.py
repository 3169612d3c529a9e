"""Up- and downgoing P and SV waves of one layer at one frequency, over many wavenumbers.

Motion is exp(i omega t - i k x); a = sqrt(k² - omega²/alpha²), b = sqrt(k² - omega²/beta²), Re > 0;
downgoing waves go as exp(-a z), exp(-b z). Displacement (ux, uz) and traction (tx, tz) = (sigma_xz, sigma_zz):
    ux = -ik (dP + uP) + b (dS - uS)            tz/mu = g (dP + uP) + 2ik b (dS - uS)
    uz = -a (dP - uP) - ik (dS + uS)            tx/mu = 2ik a (dP - uP) - g (dS + uS),   g = 2k² - omega²/beta².
Amplitudes d, u have shape (2 [P, S], column, wavenumber); 2 x 2 matrices likewise (2, 2, wavenumber).
"""

import numpy as np


def times(a, b):
    """Matrix product of (2, 2, n) and (2, m, n)."""
    return a[:, :1] * b[:1] + a[:, 1:] * b[1:]


def inverse(a):
    """Inverse of (2, 2, n)."""
    det = a[0, 0] * a[1, 1] - a[0, 1] * a[1, 0]
    return np.array([[a[1, 1], -a[0, 1]], [-a[1, 0], a[0, 0]]]) / det


class Waves:
    """The wave basis of one medium: complex moduli (Pa), density, complex omega, real wavenumbers k (n,)."""

    def __init__(self, p_modulus, s_modulus, density, omega, k):
        self.k, self.mu, self.p_modulus = k, s_modulus, p_modulus
        self.kp2 = density * omega**2 / p_modulus
        self.ks2 = density * omega**2 / s_modulus
        self.a = np.sqrt(k**2 - self.kp2)
        self.b = np.sqrt(k**2 - self.ks2)
        self.g = 2 * k**2 - self.ks2

    def motion(self, d, u):
        """(ux, uz), stacked (2, column, n)."""
        return np.stack([-1j * self.k * (d[0] + u[0]) + self.b * (d[1] - u[1]),
                         -self.a * (d[0] - u[0]) - 1j * self.k * (d[1] + u[1])])

    def traction(self, d, u):
        """(tx, tz), stacked (2, column, n)."""
        ik = 2j * self.k
        return self.mu * np.stack([ik * self.a * (d[0] - u[0]) - self.g * (d[1] + u[1]),
                                   self.g * (d[0] + u[0]) + ik * self.b * (d[1] - u[1])])

    def split(self, motion, traction):
        """Amplitudes (d, u) from motion and traction: the inverse of the two maps above."""
        tx, tz = traction / self.mu
        ux, uz = motion
        ik = 1j * self.k
        sum_p = (2 * ik * ux - tz) / self.ks2
        sum_s = (2 * ik * uz + tx) / self.ks2
        dif_p = (self.g * uz - ik * tx) / (self.a * self.ks2)
        dif_s = -(self.g * ux + ik * tz) / (self.b * self.ks2)
        return (np.stack([sum_p + dif_p, sum_s + dif_s]) / 2, np.stack([sum_p - dif_p, sum_s - dif_s]) / 2)

    def decay(self, height):
        """exp(-a height), exp(-b height) as (2, 1, n)."""
        return np.exp(-height * np.stack([self.a, self.b]))[:, None]

    def _rayleigh(self):
        """Rayleigh's function g² - 4k²ab, written so that its two terms, nearly equal at large k, do not cancel."""
        k2, ab = self.k**2, self.a * self.b
        rest = (k2 * (self.kp2 + self.ks2) - self.kp2 * self.ks2) / (k2 + ab)      # k² - ab
        return self.ks2**2 + 4 * k2 * (rest - self.ks2)

    def free_surface(self):
        """Reflection (2, 2, n) of upgoing waves at a surface without traction."""
        same = -(self.g**2 + 4 * self.k**2 * self.a * self.b)
        cross = 4j * self.k * self.g
        return np.array([[same, cross * self.b], [-cross * self.a, same]]) / self._rayleigh()

    def surface_motion(self, u):
        """Motion at a free surface under upgoing amplitudes u: motion(free_surface u, u) without cancelling terms."""
        same = 2j * self.k * self.a * self.b
        matrix = np.array([[same, self.b * self.g], [-self.a * self.g, same]]) * (2 * self.ks2 / self._rayleigh())
        return times(matrix, u)
