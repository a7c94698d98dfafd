"""A second computation of a classical control chart: individuals, moving range, EWMA, cumulative sum, run rules.

Written from the definitions (ISO 7870-2, 7870-4, 7870-6; Nelson 1984), all of it done again at every reading.
"""
import math

import numpy as np

import independent_chart

D2 = 2 / math.sqrt(math.pi)
D3 = math.sqrt(2 - 4 / math.pi)


def ewma_at(z, weight, width):
    """The EWMA of all of z with its exact limit, as weighted sums."""
    shares = np.array([weight * (1 - weight) ** (len(z) - 1 - i) for i in range(len(z))])
    return float(shares @ z), width * math.sqrt(float(shares @ shares))


def sums_of(z, allowance):
    """Both cumulative sums: the largest excess of any stretch that ends here, or 0."""
    upper = max([0.0] + [sum(v - allowance for v in z[i:]) for i in range(len(z))])
    lower = max([0.0] + [sum(-v - allowance for v in z[i:]) for i in range(len(z))])
    return upper, lower


def rules_met(z):
    """Nine on one side, six rising or falling, two of three beyond 2 and four of five beyond 1 on one side."""
    met = []
    for sign in (1, -1):
        s = sign * np.asarray(z)
        if len(s) >= 9 and (s[-9:] > 0).all():
            met.append("same_side")
        if len(s) >= 6 and (np.diff(s[-6:]) > 0).all():
            met.append("trend")
        if s[-1] > 2 and (s[-3:] > 2).sum() >= 2:
            met.append("two_of_three_beyond")
        if s[-1] > 1 and (s[-5:] > 1).sum() >= 4:
            met.append("four_of_five_beyond")
    return met


ORDER = ("above_limit", "below_limit", "moving_range_above_limit", "ewma", "cusum", "same_side", "trend",
         "two_of_three_beyond", "four_of_five_beyond")


class Chart:
    """Readings, the first `baseline` of which give the limits of all others."""

    def __init__(self, readings, baseline, ewma, cusum, clear_after=3):
        values = np.array([value for _, value in readings])
        self.learned = values[:baseline]
        self.center = float(self.learned.mean())
        self.range_mean = independent_chart.moving_range_mean(self.learned)
        self.sigma = self.range_mean / D2
        self.range_limit = (1 + 3 * D3 / D2) * self.range_mean
        self.points, self.state, quiet = [], "stable", 0
        for i, (time, value) in enumerate(readings):
            point = {"measured_at": time, "value": value, "signals": [], "set_aside": False,
                     "moving_range": abs(value - values[i - 1]) if i else None}
            if i >= baseline:
                z = (values[baseline:i + 1] - self.center) / self.sigma
                self.judge(point, z, ewma, cusum)
                quiet = 0 if point["signals"] else quiet + 1
                self.state = "unstable" if point["signals"] else "stable" if quiet >= clear_after else self.state
            else:
                point.update(upper=None, lower=None, ewma=None, cusum_upper=None, cusum_lower=None)
            self.points.append(point)

    def judge(self, point, z, ewma, cusum):
        value, limit = ewma_at(z, *ewma)
        upper, lower = sums_of(z, cusum[0])
        point.update(upper=self.center + 3 * self.sigma, lower=self.center - 3 * self.sigma,
                     moving_range_upper=self.range_limit, ewma=self.center + self.sigma * value,
                     ewma_upper=self.center + self.sigma * limit, ewma_lower=self.center - self.sigma * limit,
                     cusum_upper=upper, cusum_lower=lower)
        told = set(rules_met(z))
        told |= {"above_limit"} if z[-1] > 3 else {"below_limit"} if z[-1] < -3 else set()
        told |= {"moving_range_above_limit"} if point["moving_range"] > self.range_limit else set()
        told |= {"ewma"} if abs(value) > limit else set()
        told |= {"cusum"} if max(upper, lower) > cusum[1] else set()
        point["signals"] = [name for name in ORDER if name in told]

    def shown(self):
        n = len(self.learned)
        return {
            "method": "classical", "state": self.state, "change": None, "precision": None,
            "baseline": {"readings": n, "center": self.center, "sd": float(self.learned.std(ddof=1)),
                         "sigma": self.sigma, "moving_range_mean": self.range_mean, "set_aside": 0,
                         "sigma_degrees_of_freedom": independent_chart.moving_range_degrees_of_freedom(n)},
            "limits": {"upper": self.center + 3 * self.sigma, "lower": self.center - 3 * self.sigma,
                       "moving_range_upper": self.range_limit},
            "points": self.points}
