"""An independent minimax search for one section: a general minimiser on the largest error, from many starts.

Nothing here comes from the package. The unknowns are logarithms of the coefficients in v = (1 - z⁻¹)/(1 + z⁻¹), zeros
at 0 Hz and on the axis stay where they are, so a search never leaves the stable sections.
"""

import numpy as np
from scipy.optimize import minimize

DB = 10.0 / np.log(10.0)


def grid(b, a, low, high, count=160):
    """Frequencies in Hz, dense over the band and about the resonance."""
    f0 = np.sqrt(a[2] / a[0]) / (2.0 * np.pi)
    width = a[1] / a[0] / (4.0 * np.pi)
    near = f0 + width * np.tan(np.linspace(-1.45, 1.45, 60))
    points = np.concatenate([np.geomspace(low, high, count), np.linspace(low, high, count // 2), near])
    points = points[(points >= low) & (points <= high)]
    return np.unique(points[np.abs(points - f0) > 1e-4 * f0] if b[1] == 0.0 and b[0] * b[2] > 0.0 else points)


class Search:
    """The error of one section and its slopes over the free logarithms."""

    def __init__(self, b, a, rate, band=(20.0, 20_000.0), count=160):
        self.b, self.a, self.rate = np.asarray(b, float), np.asarray(a, float), rate
        self.f = grid(self.b, self.a, *band, count)
        self.t = np.tan(np.pi * self.f / rate) ** 2
        w = 2.0 * np.pi * self.f
        self.target = DB * np.log(self._power(self.b, w * w) / self._power(self.a, w * w))
        notch = self.b[1] == 0.0 and self.b[0] * self.b[2] > 0.0
        self.place = np.tan(0.5 * np.sqrt(self.b[2] / self.b[0]) / rate) ** 2 if notch else 0.0
        if notch:
            self.free = [0, 3, 5]
        else:
            first = 0 if self.b[2] != 0.0 else (1 if self.b[1] != 0.0 else 2)
            self.free = [k for k in (0, 1, 2) if k <= 2 - first] + [3, 5]

    @staticmethod
    def _power(c, t):
        return (c[2] - c[0] * t) ** 2 + c[1] ** 2 * t

    def coefficients(self, x):
        """b, a in v."""
        c = np.array([0.0, 0.0, 0.0, 0.0, 1.0, 0.0])
        c[self.free] = np.exp(x)
        if self.place:
            c[2] = self.place * c[0]
        return c[:3], c[3:]

    def error(self, x):
        b, a = self.coefficients(x)
        return DB * np.log(self._power(b, self.t) / self._power(a, self.t)) - self.target

    def slopes(self, x):
        b, a = self.coefficients(x)
        rows = []
        for c, sign in ((b, 1.0), (a, -1.0)):
            size, r = self._power(c, self.t), c[2] - c[0] * self.t
            parts = [-2.0 * c[0] * self.t * r, 2.0 * c[1] ** 2 * self.t, 2.0 * c[2] * r]
            rows += [sign * DB * p / size for p in parts]
        if self.place:
            rows[0] = rows[0] + rows[2]
        return np.array([rows[k] for k in self.free]).T

    def start(self, factor=1.0):
        """The prewarped bilinear transform, terms that s lacks filled in."""
        f0 = min(np.sqrt(self.a[2] / self.a[0]) / (2.0 * np.pi) * factor, 0.4 * self.rate)
        k = 2.0 * np.pi * f0 / np.tan(np.pi * f0 / self.rate)
        scale = np.array([k * k, k, 1.0])
        a = self.a * scale
        b = np.abs(self.b * scale) / a[1]
        a = a / a[1]
        for k in (1, 0):
            b[k] = b[k] or 0.3 * b[k + 1]
        return np.log(np.concatenate([b, a])[self.free])

    def minimise(self, x0):
        """One run of SLSQP on `t` with |error| ≤ t; the largest error found, dB, and where."""
        unit = max(np.abs(self.error(x0)).max() * 0.1, 1e-6)
        z0 = np.append(x0, np.abs(self.error(x0)).max() / unit)

        def inside(z):
            e = self.error(z[:-1]) / unit
            return np.concatenate([z[-1] - e, z[-1] + e])

        def inside_slopes(z):
            s = self.slopes(z[:-1]) / unit
            one = np.ones((len(s), 1))
            return np.concatenate([np.hstack([-s, one]), np.hstack([s, one])])

        last = np.zeros(len(z0))
        last[-1] = 1.0
        with np.errstate(all="ignore"):
            found = minimize(
                lambda z: z[-1],
                z0,
                jac=lambda z: last,
                method="SLSQP",
                constraints={"type": "ineq", "fun": inside, "jac": inside_slopes},
                options={"maxiter": 150, "ftol": 1e-9},
            )
            worst = np.abs(self.error(found.x[:-1])).max()
        return (worst, found.x[:-1]) if np.isfinite(worst) else (np.inf, x0)

    def best(self, starts=8):
        """The least largest error of many runs, from the bilinear transform and scattered starts."""
        scatter = np.random.default_rng(7)
        tries = [self.start(f) for f in (1.0, 0.9, 1.1)]
        tries += [tries[0] + 0.3 * scatter.standard_normal(len(self.free)) for _ in range(starts - 3)]
        best = min((self.minimise(x0) for x0 in tries), key=lambda run: run[0])
        return min(best, self.minimise(best[1]), key=lambda run: run[0])[0]
