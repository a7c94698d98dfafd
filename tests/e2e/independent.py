"""A second computation of what the service shows of two analyzers: plain loops over the pairs, from the stated rules.

Charts are in independent_chart.py; everything here is done again from the whole list of pairs at every step as well.
"""
import math

import numpy as np
from scipy import special, stats

from independent_chart import PAIRS, PAIRS_ON_A_LINE, between, limit_for, normal_score, rss, t_quantile


def pooled(charts):
    """Repeatability of one analyzer from (degrees of freedom, sd) of its standards, pooled by the former."""
    df = sum(nu for nu, _ in charts)
    return math.sqrt(sum(nu * sd**2 for nu, sd in charts) / df), df


def repeatability_at(charts, time):
    """What each chart knew at a moment."""
    latest = [[p["repeatability"] for p in c.points if p["time"] <= time][-1:] for c in charts]
    return [known[0] for known in latest if known and known[0]]


class ErrorRatio:
    def __init__(self, x_charts, y_charts):
        self.sd_x, self.df_x = pooled(x_charts)
        self.sd_y, self.df_y = pooled(y_charts)
        self.ratio = (self.sd_x / self.sd_y) ** 2
        self.low = self.ratio / stats.f.ppf(0.975, self.df_x, self.df_y)
        self.high = self.ratio * stats.f.ppf(0.975, self.df_y, self.df_x)

    def shown(self):
        return {"lambda": self.ratio, "low": self.low, "high": self.high, "sd_x": self.sd_x, "sd_y": self.sd_y,
                "df_x": self.df_x, "df_y": self.df_y}


def deming(x, y, ratio):
    """Intercept and slope (Fuller 1987, eq. 1.3.7); ratio = var(x error)/var(y error)."""
    delta = 1 / ratio
    mx, my = x.mean(), y.mean()
    sxx, syy, sxy = ((x - mx) ** 2).sum(), ((y - my) ** 2).sum(), ((x - mx) * (y - my)).sum()
    d = syy - delta * sxx
    slope = (d + np.sqrt(d * d + 4 * delta * sxy * sxy)) / (2 * sxy)
    return my - slope * mx, slope


class Fit:
    """The line with its jackknife and its analytic covariance."""

    def __init__(self, x, y, error):
        self.x, self.y, self.n = x, y, len(x)
        self.intercept, self.slope = deming(x, y, error.ratio)
        self.residuals = y - self.intercept - self.slope * x
        self.variance = float((self.residuals**2).sum() / (self.n - 2))
        self.error = error
        self.uncertain_ratio = self.part_of_ratio()
        self.cov = self.jackknife()
        self.analytic = self.fuller()

    def part_of_ratio(self):
        """Variance of the slope that comes from the ratio being estimated: (d slope / d ln ratio)^2 var(ln ratio).

        The derivative is taken with a complex step, which loses no digits."""
        e, step = self.error, 1e-30
        derivative = deming(self.x, self.y, e.ratio * np.exp(1j * step))[1].imag / step
        return derivative**2 * (special.polygamma(1, e.df_y / 2) + special.polygamma(1, e.df_x / 2))

    def add_ratio(self, cov):
        """The line turns about the middle of the data, so intercept and slope move against each other."""
        mx = self.x.mean()
        return cov + self.uncertain_ratio * np.array([[mx * mx, -mx], [-mx, 1]])

    def jackknife(self):
        lines = np.array([deming(np.delete(self.x, i), np.delete(self.y, i), self.error.ratio) for i in range(self.n)])
        off = lines - lines.mean(axis=0)
        return self.add_ratio((self.n - 1) / self.n * off.T @ off)

    def fuller(self):
        """Fuller 1987, theorem 1.3.1."""
        n, b1, delta = self.n, self.slope, 1 / self.error.ratio
        mx = self.x.mean()
        sxx, syy = rss(self.x), rss(self.y)
        sxy = ((self.x - mx) * (self.y - self.y.mean())).sum()
        d = syy - delta * sxx
        s_xi = (math.sqrt(d * d + 4 * delta * sxy * sxy) - d) / (2 * delta * (n - 1))
        s_uu = self.variance / (delta + b1 * b1)
        v = (s_xi * self.variance + delta * s_uu**2) / ((n - 1) * s_xi**2)
        return self.add_ratio(np.array([[self.variance / n + mx * mx * v, -mx * v], [-mx * v, v]]))

    def fitted_true(self):
        return self.foot(self.x, self.y)

    def foot(self, x, y):
        """The point of the line that a pair most probably belongs to."""
        delta = 1 / self.error.ratio
        return (delta * x + self.slope * (y - self.intercept)) / (delta + self.slope**2)

    def line_variance(self, pair):
        at = np.array([1.0, self.foot(pair.x, pair.y)])
        return at @ self.analytic @ at

    def of_new_pair(self, pair):
        """Residual of a pair that the line does not know, over its standard error."""
        return (pair.y - self.intercept - self.slope * pair.x) / math.sqrt(self.variance + self.line_variance(pair))

    def of_own_pair(self, pair):
        return (pair.y - self.intercept - self.slope * pair.x) / math.sqrt(self.variance - self.line_variance(pair))

    def shown(self):
        t = t_quantile(0.975, self.n - 2)
        se = np.sqrt(np.diag(self.cov))
        off = np.array([self.intercept, self.slope - 1])
        f = off @ np.linalg.solve(self.cov, off) / 2
        return {"intercept": self.intercept, "slope": self.slope, "se_intercept": se[0], "se_slope": se[1],
                "cov": self.cov[0, 1], "analytic_se_intercept": math.sqrt(self.analytic[0, 0]),
                "analytic_se_slope": math.sqrt(self.analytic[1, 1]),
                "intercept_interval": [self.intercept - t * se[0], self.intercept + t * se[0]],
                "slope_interval": [self.slope - t * se[1], self.slope + t * se[1]],
                "identity_p": stats.f.sf(f, 2, self.n - 2),
                "slope_at_lambda_low": deming(self.x, self.y, self.error.low)[1],
                "slope_at_lambda_high": deming(self.x, self.y, self.error.high)[1]}

    def level(self, at, allowable, least_pairs):
        design = np.array([1.0, at])
        bias = self.intercept + (self.slope - 1) * at
        se = math.sqrt(design @ self.cov @ design)
        half = t_quantile(0.95, self.n - 2) * se
        s = math.sqrt(self.variance)
        single = t_quantile(0.975, self.n - 2) * s
        low, high = bias - half, bias + half
        covered = self.fitted_true().min() <= at <= self.fitted_true().max()
        verdict = "inconclusive" if not covered else \
            "agreement_shown" if -allowable < low and high < allowable and self.n >= least_pairs else \
            "disagreement_shown" if low > allowable or high < -allowable else "inconclusive"
        return {"level": at, "bias": bias, "se": se, "low": low, "high": high, "allowable": allowable,
                "verdict": verdict,
                "single_result": {"share_within": stats.norm.cdf((allowable - bias) / s) -
                                  stats.norm.cdf((-allowable - bias) / s),
                                  "low": bias - single, "high": bias + single}}

    def scatter(self):
        e = self.error
        vy, vx = e.sd_y**2, self.slope**2 * e.sd_x**2
        df = (vy + vx) ** 2 / (vy**2 / e.df_y + vx**2 / e.df_x)
        ratio = self.variance / (vy + vx)
        return {"observed_sd": math.sqrt(self.variance), "expected_sd": math.sqrt(vy + vx), "variance_ratio": ratio,
                "p": stats.f.sf(ratio, self.n - 2, df)}


def curvature_p(fit):
    """F test of the square of the fitted true value in the residuals."""
    w = fit.fitted_true() - fit.fitted_true().mean()
    straight, bent = np.column_stack([np.ones(fit.n), w]), np.column_stack([np.ones(fit.n), w, w * w])
    rest = [float(((fit.residuals - d @ np.linalg.lstsq(d, fit.residuals, rcond=None)[0]) ** 2).sum())
            for d in (straight, bent)]
    return stats.f.sf((rest[0] - rest[1]) / (rest[1] / (fit.n - 3)), 1, fit.n - 3)


def chance_of_agreement(level, scale, pairs):
    """Of showing agreement at one look, the bias staying what it is, at a standard error of `scale` times this one."""
    t, se = t_quantile(0.95, pairs - 2), level["se"] * scale
    room, bias = level["allowable"], abs(level["bias"])
    return stats.norm.cdf((room - bias) / se - t) - stats.norm.cdf(t - (room + bias) / se)


def pairs_to_agreement(levels, pairs):
    """More pairs for a chance of 90 % at every level, each number tried in turn."""
    needed = pairs
    for level in levels:
        while chance_of_agreement(level, math.sqrt(pairs / needed), needed) < 0.9:
            needed += 1
    return needed - pairs


def differences(x, y, allowable):
    """Bland and Altman 1999, Clopper and Pearson 1934."""
    d = y - x
    n, mean, sd, z = len(d), d.mean(), d.std(ddof=1), stats.norm.ppf(0.975)
    t = t_quantile(0.975, n - 1)
    of_mean, of_limit = t * sd / math.sqrt(n), t * sd * math.sqrt(1 / n + z * z / (2 * (n - 1)))
    lower, upper = mean - z * sd, mean + z * sd
    count = int((np.abs(d) <= np.array([allowable(v) for v in x])).sum())
    interval = [stats.beta.ppf(0.025, count, n - count + 1) if count else 0.0,
                stats.beta.ppf(0.975, count + 1, n - count) if count < n else 1.0]
    return {"mean": mean, "sd": sd, "mean_interval": [mean - of_mean, mean + of_mean],
            "lower_limit": lower, "upper_limit": upper,
            "lower_limit_interval": [lower - of_limit, lower + of_limit],
            "upper_limit_interval": [upper - of_limit, upper + of_limit],
            "within_allowable": {"count": count, "of": n, "interval": interval},
            "paired_t_p": stats.ttest_rel(y, x).pvalue}


def concordance(x, y):
    """Lin 1989, divisor n."""
    return 2 * ((x - x.mean()) * (y - y.mean())).mean() / (x.var() + y.var() + (x.mean() - y.mean()) ** 2)


def passing_bablok(x, y):
    """Passing and Bablok 1983."""
    n = len(x)
    slopes = []
    for i in range(n):
        for j in range(i + 1, n):
            dx, dy = x[j] - x[i], y[j] - y[i]
            if abs(dx) < 1e-9 and abs(dy) < 1e-9:
                continue
            slope = math.inf * (1 if dy > 0 else -1) if abs(dx) < 1e-9 else dy / dx
            if abs(slope + 1) > 1e-12:
                slopes.append(slope)
    slopes.sort()
    count = len(slopes)
    below = sum(s < -1 for s in slopes)
    slope = (slopes[(count - 1) // 2 + below] + slopes[count // 2 + below]) / 2
    c = stats.norm.ppf(0.975) * math.sqrt(n * (n - 1) * (2 * n + 5) / 18)
    m1 = int(round((count - c) / 2))
    low, high = slopes[m1 + below - 1], slopes[count - m1 + below]
    return {"slope": slope, "slope_interval": [low, high], "intercept": float(np.median(y - slope * x)),
            "intercept_interval": [float(np.median(y - high * x)), float(np.median(y - low * x))]}


class PairChange:
    """Do two lines, before and after some moment, describe the pairs better than one?"""

    def __init__(self, x, y, ratio):
        n, delta = len(x), 1 / ratio
        intercept, slope = deming(x, y, ratio)
        v = y - intercept - slope * x
        w = (delta * x + slope * (y - intercept)) / (delta + slope**2)

        def around_line(vs, ws):
            design = np.column_stack([np.ones(len(ws)), ws - w.mean()])
            coefficients = np.linalg.lstsq(design, vs, rcond=None)[0]
            return float(((vs - design @ coefficients) ** 2).sum())
        one = around_line(v, w)
        inside = {k: around_line(v[:k], w[:k]) + around_line(v[k:], w[k:]) for k in range(4, n - 2)}
        self.k = min(inside, key=lambda k: (inside[k], k))
        f = (one - inside[self.k]) / 2 / (inside[self.k] / (n - 5))
        self.score = normal_score(stats.f.sf(f, 2, n - 5) / 2)
        self.between = between(inside, self.k, n)


class DepartureFromLine:
    """Do the pairs from some moment on lie on a line of their own, and not on the established one?"""

    def __init__(self, x, y, ratio, relation):
        n, delta = len(x), 1 / ratio
        intercept, slope = relation
        v = y - intercept - slope * x
        w = delta * x + slope * (y - intercept)
        whole = float((v**2).sum())

        def around_own_line(k):
            design = np.column_stack([np.ones(n - k), w[k:] - w.mean()])
            coefficients = np.linalg.lstsq(design, v[k:], rcond=None)[0]
            return float(((v[k:] - design @ coefficients) ** 2).sum())
        inside = {k: float((v[:k] ** 2).sum()) + around_own_line(k) for k in range(0, n - 2)}
        self.k = min(inside, key=lambda k: (inside[k], k))
        f = (whole - inside[self.k]) / 2 / (inside[self.k] / (n - 3))
        self.score = normal_score(stats.f.sf(f, 2, n - 3) / 2)
        self.between = between(inside, self.k, n)


def pair_change(x, y, error, relation=None):
    """The change at the estimated ratio; its score counts only if it holds at both ends of the ratio's interval."""
    ratios = (error.low, error.ratio, error.high)
    at = [DepartureFromLine(x, y, r, relation) if relation else PairChange(x, y, r) for r in ratios]
    middle = at[1]
    middle.score = min(c.score for c in at)
    return middle


class Pair:
    def __init__(self, sample, time, x, y):
        self.sample, self.time, self.x, self.y = sample, time, x, y
        self.outlier = False
        self.at_arrival = None  # studentised residual and its p


def xy(pairs):
    return np.array([p.x for p in pairs]), np.array([p.y for p in pairs])


class Comparison:
    """Pairs folded one by one: which are kept, when the pair chart speaks, what is left in the window."""

    def __init__(self, pairs, error_at, capacity, warning, least_p, relation=None):
        self.error_at, self.capacity, self.least_p = error_at, capacity, least_p
        table = PAIRS_ON_A_LINE if relation else PAIRS
        self.warning, self.warning_limit = warning, limit_for(table, warning)
        self.critical_limit = limit_for(table, 10 * warning)
        self.relation = relation  # until a change was told
        self.pairs, self.stretch, self.held = pairs, [], []
        self.severity, self.change, self.restarted = None, None, False
        self.line = None  # as it stood after the pair before
        for pair in pairs:
            self.take(pair)

    def window(self):
        return self.stretch[-self.capacity:]

    def take(self, pair):
        error = self.error_at(pair.time)
        flagged = self.line is not None and self.flagged(pair)
        for held in self.held:
            held["chances"] -= 1
        if not flagged:
            self.accept(pair, error)
        else:
            side = math.copysign(1, pair.at_arrival[0])
            same = [h for h in self.held if h["side"] == side]
            if same:
                for h in same:
                    self.held.remove(h)
                    self.accept(h["pair"], error)
                self.accept(pair, error)
            else:
                self.held.append({"pair": pair, "side": side, "chances": 2})
        for h in [h for h in self.held if h["chances"] <= 0]:
            h["pair"].outlier = True
            self.held.remove(h)
        if not flagged and error is not None and len(self.window()) >= 4:
            self.line = Fit(*xy(self.window()), error)

    def flagged(self, pair):
        residual = self.line.of_new_pair(pair)
        pair.at_arrival = residual, 2 * stats.t.sf(abs(residual), self.line.n - 2)
        return pair.at_arrival[1] < self.least_p

    def accept(self, pair, error):
        self.stretch.append(pair)
        self.change = None
        if error is None or len(self.stretch) < 7:
            return
        self.change = pair_change(*xy(self.stretch), error, self.relation)
        if self.change.score > self.critical_limit:
            self.severity, self.restarted, self.relation = "critical", True, None
            self.before = self.stretch[:self.change.k]
            self.stretch = self.stretch[self.change.k:]
            self.change = None if len(self.stretch) < 7 else pair_change(*xy(self.stretch), error)
        elif self.change.score > self.warning_limit:
            self.severity = self.severity or "warning"
