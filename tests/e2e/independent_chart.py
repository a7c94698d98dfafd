"""A second computation of what the service shows of a check standard: plain loops in numpy and scipy.

Written from the published formulas and from the stated rules alone. Everything is done again from the whole list of
readings at every step; nothing is updated, nothing is kept between steps, so that a mistake in the service's running
sums, blocks or look-ups cannot be repeated here.
"""
import math
import pathlib

import numpy as np
from scipy import optimize, special, stats

def pooled(score):
    """Limits and mean readings between false signals: the simulated runs, pooled by signals, to four digits."""
    sums = {}
    for line in (pathlib.Path(__file__).resolve().parents[1] / "data" / "run_lengths.csv").read_text().splitlines():
        if line.startswith(score + ","):
            limit, run_length, _, signals = (float(field) for field in line.split(",")[1:5])
            of_limit = sums.setdefault(limit, [0.0, 0.0])
            of_limit[0] += run_length * signals
            of_limit[1] += signals
    limits = sorted(sums)
    return limits, [float(f"{sums[h][0] / sums[h][1]:.4g}") for h in limits]


def first_limits():
    """How far the limit of the level lies from its later one at the first readings: the simulated limits, means over
    neighbouring readings (noisier at the larger limits), to three decimals."""
    simulated = {}
    for line in (pathlib.Path(__file__).resolve().parents[1] / "data" / "first_limits.csv").read_text().splitlines():
        if line[0].isdigit():
            later, n, limit = (float(field) for field in line.split(",")[:3])
            simulated[int(n), later] = limit - later

    def smoothed(n, later):
        reach = 0 if n < 10 else 2 if later > 4.1 else 1
        near = [simulated[m, later] for m in range(n - reach, n + reach + 1)
                if (m, later) in simulated and (m >= 9 or reach < 2)]
        return round(sum(near) / len(near), 3)
    return {n: [smoothed(n, later) for later in LATER_LIMITS] for n in (5, 6, 7, 8, 9, 10, 12, 15, 20, 29)}


LATER_LIMITS = (2.6, 3.0, 3.5, 4.0, 4.4, 4.8)
FIRST_LIMITS = first_limits()
LEVEL, PRECISION, PAIRS = pooled("level"), pooled("precision"), pooled("pairs")
PAIRS_ON_A_LINE = pooled("pairs_established_line")
PAIRS_LAW = 1.11  # beyond a table of pairs ln(run length) goes on as h^2/2 - 1.11 ln h
NOT_CONFIRMED = 0.9  # a score so far below its limit takes the signal back
WITHIN = 3.0         # log-likelihood by which a start may be worse than the best one
D2 = 2 / math.sqrt(math.pi)


def limit_for(table, run_length):
    limits, lengths = table
    assert lengths[0] <= run_length, "below the table"
    if run_length > lengths[-1]:
        assert table in (PAIRS, PAIRS_ON_A_LINE), "beyond the table"

        def beyond(h):
            return h * h / 2 - PAIRS_LAW * math.log(h)
        return optimize.brentq(lambda h: math.log(lengths[-1]) + beyond(h) - beyond(limits[-1]) - math.log(run_length),
                               limits[-1], 10, xtol=1e-13)
    return float(np.interp(math.log(run_length), np.log(lengths), limits))


def level_limit_at(n, later):
    if not 5 <= n <= 29:
        return later
    rows = sorted(FIRST_LIMITS)
    return later + float(np.interp(n, rows, [np.interp(later, LATER_LIMITS, FIRST_LIMITS[row]) for row in rows]))


def normal_score(tail):
    """The standard normal value with so much probability above it."""
    return float(stats.norm.isf(tail))


def t_quantile(probability, df):
    """By the beta function: scipy's own quantile of t is good to 4e-9 only."""
    beta = special.betaincinv(df / 2, 0.5, 2 * min(probability, 1 - probability))
    return math.copysign(math.sqrt(df * (1 - beta) / beta), probability - 0.5)


def moving_range_degrees_of_freedom(n):
    """The degrees of freedom at which a sample sd is as uncertain as the mean of n - 1 moving ranges."""
    m = n - 1
    c = 4 / math.pi * (math.sqrt(3) / 2 + math.pi / 12 - 1)
    cv2 = (m * (2 - 4 / math.pi) + 2 * (m - 1) * c) / m**2 / (4 / math.pi)

    def excess(nu):
        c4 = math.sqrt(2 / nu) * math.exp(special.gammaln((nu + 1) / 2) - special.gammaln(nu / 2))
        return (1 - c4**2) / c4**2 - cv2
    return optimize.brentq(excess, 1e-3, 1e6, xtol=1e-13, rtol=1e-14)


def moving_range_mean(values):
    return float(np.abs(np.diff(values)).mean())


def rss(values):
    values = np.asarray(values, float)
    return float(((values - values.mean()) ** 2).sum()) if len(values) else 0.0


def step_of(values, decimals):
    """The resolution: as configured, else the smallest gap between two different readings."""
    if decimals is not None:
        return 10.0 ** -decimals
    gaps = np.diff(np.unique(np.round(values, 9)))
    return float(gaps.min()) if len(gaps) else 0.0


class Level:
    """Is there a moment that splits the readings into two that differ in their mean?"""

    def __init__(self, values, resolution):
        v = np.asarray(values, float)
        n = len(v)
        self.n = n
        self.floor = (n - 2) * resolution**2 / 12
        total = rss(v)
        self.inside = {k: max(total - k * (n - k) / n * (v[k:].mean() - v[:k].mean()) ** 2, self.floor)
                       for k in range(3, n)}
        t = {k: math.sqrt((n - 2) * k * (n - k) / n * (v[k:].mean() - v[:k].mean()) ** 2 / self.inside[k])
             for k in self.inside}
        self.k = max(t, key=lambda k: (t[k], -k))
        self.shift = float(v[self.k:].mean() - v[:self.k].mean())
        self.score = math.copysign(normal_score(stats.t.sf(t[self.k], n - 2)), self.shift)
        self.between = between(self.inside, self.k, n)

    def at(self, limit):
        return abs(self.score) > limit


def between(inside, best, n):
    near = [k for k in inside if n / 2 * math.log(inside[k] / inside[best]) <= WITHIN]
    return min(near), max(near)


def lag_one(values, k):
    """Lag-1 correlation of the deviations from the two means, no product across the split."""
    v = np.asarray(values, float)
    deviations = np.concatenate([part - part.mean() for part in (v[:k], v[k:]) if len(part)])
    products = sum(deviations[i] * deviations[i + 1] for i in range(len(v) - 1) if i + 1 != k)
    return float(products / (deviations**2).sum())


def level_allowing_for_correlation(values, k_best, resolution):
    """The level score when each reading carries over a part of the one before."""
    v = np.asarray(values, float)
    n = len(v)
    raw = lag_one(v, k_best)
    r = min(max(raw + (1 + 4 * raw) / n, 0.0), 0.9)

    def f(m):
        return (1 + r) / (1 - r) - 2 * r * (1 - r**m) / (m * (1 - r) ** 2)
    best = 0.0
    for k in range(3, n):
        b = (v[k:].mean() - v[:k].mean()) ** 2 / (f(k) / k + f(n - k) / (n - k))
        inside = max(rss(v[:k]) + rss(v[k:]), (n - 2) * resolution**2 / 12)
        best = max(best, math.sqrt((n - 2) * b / inside))
    return normal_score(stats.t.sf(best, n - 2))


class Precision:
    """Is there a moment after which the readings scatter more?"""

    def __init__(self, values, resolution):
        v = np.asarray(values, float)
        n = len(v)
        self.k, self.score, self.ratio = None, -math.inf, None
        least = resolution**2 / 12
        for k in range(5, n - 1):
            f = max(v[k:].var(ddof=1), least) / max(v[:k].var(ddof=1), least)
            a, b = 2 / (9 * (n - k - 1)), 2 / (9 * (k - 1))
            z = ((1 - b) * f ** (1 / 3) - (1 - a)) / math.sqrt(b * f ** (2 / 3) + a)
            if z > self.score:
                self.k, self.score, self.ratio = k, z, math.sqrt(f)


class Chart:
    """A chart folded reading by reading: scores, signals, what is set aside, and what is shown at the end."""

    def __init__(self, readings, decimals, run_length, clear_after=3):
        self.decimals, self.run_length, self.clear_after = decimals, run_length, clear_after
        self.limit, self.precision_limit = limit_for(LEVEL, run_length), limit_for(PRECISION, run_length)
        self.points, self.kept = [], []
        self.unstable = None  # (pattern, k fixed at the signal)
        for time, value in readings:
            self.take(time, value)

    def take(self, time, value):
        point = {"time": time, "value": value, "score": None, "precision_score": None, "signals": [],
                 "set_aside": False, "moving_range": abs(value - self.kept[-1]["value"]) if self.kept else None}
        self.points.append(point)
        self.kept.append(point)
        self.judge()
        point["score"] = self.level.score if self.level else None
        point["precision_score"] = self.precision.score if self.precision else None
        if self.unstable is None:
            self.open(point)
        elif self.unstable[0] != "scatter":
            self.close_shift()
        self.judge()
        learned = self.learned()
        point["repeatability"] = None if len(learned) < 2 else \
            (moving_range_degrees_of_freedom(len(learned)), moving_range_mean(learned) / D2)
        point["level"] = float(learned.mean())

    def learned(self):
        """The readings that describe the standard: while a change is open, those before its start."""
        return self.values() if self.unstable is None else self.values()[:self.unstable[1]]

    def judge(self):
        v = self.values()
        r = step_of(v, self.decimals)
        self.level = Level(v, r) if len(v) >= 5 else None
        self.precision = Precision(v, r) if len(v) >= 7 else None

    def values(self):
        return np.array([p["value"] for p in self.kept])

    def open(self, point):
        v, n = self.values(), len(self.kept)
        limit = level_limit_at(n, self.limit)
        level = self.level is not None and self.level.at(limit)
        if level and n >= 15:
            level = level_allowing_for_correlation(v, self.level.k, step_of(v, self.decimals)) > limit
        scatter = self.precision is not None and self.precision.score > self.precision_limit
        if level:
            word = "single" if self.level.k == n - 1 else "shift"
            up = self.level.shift > 0
            point["signals"].append(f"{word}_" + (("high" if up else "low") if word == "single" else
                                                  ("up" if up else "down")))
            self.unstable = ("single_reading" if word == "single" else "shift", self.level.k)
        if scatter:
            point["signals"].append("scatter_up")
            self.unstable = self.unstable or ("scatter", self.precision.k)

    def close_shift(self):
        v, n, k = self.values(), len(self.kept), self.unstable[1]
        floor = (n - 2) * step_of(v, self.decimals) ** 2 / 12
        ends = {c: max(rss(v[k:c]) + rss(np.concatenate([v[:k], v[c:]])), floor)
                for c in range(k + 1, n - self.clear_after + 1)}
        if not ends:
            return
        c = min(ends, key=lambda c: (ends[c], c))
        last, none = max(rss(v[:k]) + rss(v[k:]), floor), max(rss(v), floor)
        ended = n / 2 * math.log(last / ends[c]) >= math.log(self.run_length)
        if not ended and abs(self.level.score) >= self.limit - NOT_CONFIRMED:
            return
        t = math.sqrt(max((n - 2) * (none - ends[c]) / ends[c], 0))
        aside = normal_score(stats.t.sf(t, n - 2)) > self.limit
        gain = n / 2 * math.log(none / ends[c]) if aside else 0.0
        if self.gain_of_scatter() > gain - 4:
            return  # lasting scatter explains it nearly as well
        if aside:
            for p in self.kept[k:c]:
                p["set_aside"] = True
            self.kept = self.kept[:k] + self.kept[c:]
        self.unstable = None

    def gain_of_scatter(self):
        v, n = self.values(), len(self.kept)

        def cost(part):
            return len(part) / 2 * math.log(rss(part) / len(part))
        return max((cost(v) - cost(v[:k]) - cost(v[k:]) for k in range(5, n - 1)
                    if v[k:].var(ddof=1) > v[:k].var(ddof=1)), default=0.0)

    def shown(self, reference=None):
        """What the service shows of it; reference: (value, expanded uncertainty, coverage factor)."""
        v = self.learned()
        n, mean, sd = len(v), float(v.mean()), float(v.std(ddof=1))
        half = t_quantile(stats.norm.cdf(level_limit_at(n + 1, self.limit)), n - 1) * sd * math.sqrt(1 + 1 / n)
        out = {
            "baseline": {"readings": n, "center": mean, "sd": sd, "sd_degrees_of_freedom": n - 1,
                         "carried_over": 0, "sigma": moving_range_mean(v) / D2,
                         "sigma_degrees_of_freedom": moving_range_degrees_of_freedom(n),
                         "moving_range_mean": moving_range_mean(v),
                         "set_aside": sum(p["set_aside"] for p in self.points)},
            "limits": {"upper": mean + half, "lower": mean - half},
            "change": {"score": self.level.score, "limit": self.limit,
                       "limit_now": level_limit_at(len(self.kept), self.limit), "in_control_run_length": self.run_length},
            "precision": {"score": self.precision.score, "limit": self.precision_limit,
                          "in_control_run_length": self.run_length, "ratio_of_sd": self.precision.ratio},
            "serial_correlation": lag_one(v, n),
            "state": "unstable" if self.unstable else "stable" if n >= 30 else "learning",
            "points": [{"measured_at": p["time"], "value": p["value"], "moving_range": p["moving_range"],
                        "score": p["score"], "precision_score": p["precision_score"], "signals": p["signals"],
                        "set_aside": p["set_aside"]} for p in self.points]}
        if self.unstable and self.unstable[0] != "scatter":
            first, last = self.level.between
            out["change"].update(started_at=self.kept[self.level.k]["time"], shift=self.level.shift,
                                 started_between=[self.kept[first]["time"], self.kept[last]["time"]])
        elif self.unstable:
            out["change"].update(started_at=self.kept[self.precision.k]["time"])
        if reference:
            value, expanded, factor = reference
            u = math.sqrt(sd**2 / n + (expanded / factor) ** 2)
            out["reference"] = {"value": value, "expanded_uncertainty": expanded, "coverage_factor": factor,
                                "bias": mean - value, "normalised_error": (mean - value) / (2 * u),
                                "allowed_bias": expanded + self.limit * sd / math.sqrt(n) if n >= 30 else None}
        return out


def runs_of_replicates(runs, run_length):
    """What a chart shows of runs of equally many replicates while nothing is wrong with them."""
    data = np.array(runs, float)
    n, k = data.shape
    squares = ((data - data.mean(axis=1, keepdims=True)) ** 2).sum(axis=1)

    def score(split):
        before, after = split * (k - 1), (n - split) * (k - 1)
        f = (squares[split:].sum() / after) / (squares[:split].sum() / before)
        a, b = 2 / (9 * after), 2 / (9 * before)
        return ((1 - b) * f ** (1 / 3) - (1 - a)) / math.sqrt(b * f ** (2 / 3) + a)
    within = squares.sum() / (n * (k - 1))
    of_means = (moving_range_mean(data.mean(axis=1)) / D2) ** 2
    return {"points": [{"value": float(run.mean()), "replicates": k, "within_sd": float(run.std(ddof=1))} for run in data],
            "precision": {"score": max(score(split) for split in range(1, n) if split * (k - 1) >= 4),
                          "limit": limit_for(PRECISION, (2 - 1 / (k - 1)) * run_length),
                          "in_control_run_length": run_length},
            "replicates": {"runs": n, "per_run": k, "within_sd": math.sqrt(within),
                           "within_degrees_of_freedom": n * (k - 1),
                           "between_sd": math.sqrt(max(of_means - within / k, 0.0)), "tell_precision": True}}


def effect(before, after):
    """after - before with Welch's interval."""
    before, after = np.asarray(before, float), np.asarray(after, float)
    parts = [v.var(ddof=1) / len(v) for v in (before, after)]
    df = sum(parts) ** 2 / sum(p**2 / (len(v) - 1) for p, v in zip(parts, (before, after)))
    half = -t_quantile(0.025, df) * math.sqrt(sum(parts))
    difference = float(after.mean() - before.mean())
    return {"readings_before": len(before), "readings_after": len(after), "mean_before": float(before.mean()),
            "mean_after": float(after.mean()), "difference": difference, "low": difference - half,
            "high": difference + half}
