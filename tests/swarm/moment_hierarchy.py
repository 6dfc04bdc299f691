"""Constant collision frequencies: the exact growth exponent of a tilted swarm, to any order in alpha.

The swarm is weighted with exp(-alpha z) and collides with atoms at rest at frequencies that do not depend on energy.
Moments m_kn of v^k P_n(cos theta) then obey, lambda being the growth exponent, with m_00 = 1,

    lambda m_kn = a [n (k + n + 1) m_(k-1)(n-1) + (n + 1) (k - n) m_(k-1)(n+1)] / (2 n + 1)
                  + rate_kn m_kn - alpha [n m_(k+1)(n-1) + (n + 1) m_(k+1)(n+1)] / (2 n + 1),

as d/dv_z and v_z act on v^k P_n by the recurrences of the Legendre polynomials, and isotropic scattering about the
centre of mass keeps n. Order by order in alpha this is triangular: order j needs order j - 1 at one degree more.
(Boltzmann's equation, multiplied and integrated; derived here.)
"""

import numpy as np
from scipy.integrate import quad
from scipy.optimize import newton
from scipy.special import eval_legendre


def kept(k, degree, centre, relative):
    """Mean of |v'|^k P_n(cos angle) for v' = centre e_z + relative n, n isotropic: what scattering keeps of v^k P_n."""

    def integrand(cosine):
        size = np.sqrt(centre**2 + relative**2 + 2.0 * centre * relative * cosine)
        return 0.5 * size**k * eval_legendre(degree, (centre + relative * cosine) / size)

    return quad(integrand, -1.0, 1.0, epsabs=1e-13, epsrel=1e-12, limit=200)[0]


class Hierarchy:
    """Power series in alpha of the exponent and of the moments; units: acceleration a, frequencies and speeds alike.

    mass_ratio : m/M. elastic, ionization, attachment : frequencies; ionization costs nothing and shares equally.
    """

    def __init__(self, acceleration, mass_ratio, elastic, ionization, attachment, orders):
        self.a, self.orders = acceleration, orders
        centre, relative = mass_ratio / (1.0 + mass_ratio), 1.0 / (1.0 + mass_ratio)

        def rate(k, degree):
            once, twice = kept(k, degree, centre, relative), kept(k, degree, centre, relative / np.sqrt(2.0))
            return elastic * (once - 1.0) + ionization * (2.0 * twice - 1.0) - attachment

        top = orders + 2
        self.rate = {(k, n): rate(k, n) for k in range(top + 1) for n in range(k % 2, k + 1, 2)}
        self.moments = [{} for _ in range(orders)]
        self.exponent = [self.rate[0, 0]]
        for order in range(orders):
            self._solve(order, top - order)
            self.exponent.append(-self.moments[order][1, 1])

    def _solve(self, order, top):
        now, before = self.moments[order], self.moments[order - 1] if order else {}
        for k in range(top + 1):
            for n in range(k % 2, k + 1, 2):
                if (k, n) == (0, 0):
                    now[k, n] = 1.0 if order == 0 else 0.0
                    continue
                low, high = n / (2.0 * n + 1.0), (n + 1.0) / (2.0 * n + 1.0)
                gain = self.a * (
                    low * (k + n + 1.0) * now.get((k - 1, n - 1), 0.0) + high * (k - n) * now.get((k - 1, n + 1), 0.0)
                )
                if order:
                    gain -= low * before.get((k + 1, n - 1), 0.0) + high * before.get((k + 1, n + 1), 0.0)
                    gain -= sum(self.exponent[j] * self.moments[order - j][k, n] for j in range(1, order + 1))
                now[k, n] = gain / (self.exponent[0] - self.rate[k, n])

    def root(self):
        """The alpha next to 0 at which the exponent vanishes, and what the last order adds to it."""
        roots = [
            newton(np.polynomial.Polynomial(self.exponent[:count]), 0.0) for count in (self.orders, self.orders + 1)
        ]
        return roots[1], abs(roots[1] - roots[0])

    def moment(self, k, degree, alpha):
        """A moment at alpha."""
        return sum(self.moments[j][k, degree] * alpha**j for j in range(self.orders))
