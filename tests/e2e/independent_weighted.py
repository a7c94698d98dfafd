"""A second computation of lines whose errors grow with the level: textbook passes over all pairs, and a full refit
without each pair for the standard errors."""
import math

import numpy as np
from scipy import special, stats

from independent import deming
from independent_chart import t_quantile


class Model:
    """Variance a2 + b2 level^2 of one analyzer, from two check standards given as (degrees of freedom, sd, level)."""

    def __init__(self, growth, standards):
        df, variance = np.array([s[0] for s in standards]), np.array([s[1] ** 2 for s in standards])
        square = np.array([s[2] ** 2 for s in standards])
        if growth == "proportional":
            self.a2, self.b2 = 0.0, float((df * variance / square).sum() / df.sum())
            self.covariance = np.diag([0.0, 2 * self.b2**2 / df.sum()])
            return
        self.b2 = float((variance[1] - variance[0]) / (square[1] - square[0]))
        self.a2 = float(variance[0] - self.b2 * square[0])
        if self.b2 < 0:
            self.a2, self.b2 = float((df * variance).sum() / df.sum()), 0.0
        elif self.a2 < 0:
            self.a2, self.b2 = 0.0, float((df * variance / square).sum() / df.sum())
        design = np.column_stack([np.ones(2), square]) / self.at(np.sqrt(square))[:, None]
        self.covariance = np.linalg.inv(design.T @ (df[:, None] / 2 * design))

    def at(self, level):
        return self.a2 + self.b2 * level**2

    def df(self, level):
        row = np.array([1.0, level**2])
        return 2 * self.at(level) ** 2 / (row @ self.covariance @ row)

    def shown(self, level):
        return {"constant": math.sqrt(self.a2), "relative": math.sqrt(self.b2), "df": self.df(level)}


class Error:
    """Both analyzers' models, and the ratio of their variances at the mean level of the standards."""

    def __init__(self, growth, x_standards, y_standards):
        self.growth, self.x, self.y = growth, Model(growth, x_standards), Model(growth, y_standards)
        both = np.array(list(x_standards) + list(y_standards))
        self.level = float((both[:, 0] * both[:, 2]).sum() / both[:, 0].sum())
        self.df_x, self.df_y = self.x.df(self.level), self.y.df(self.level)
        self.ratio = self.x.at(self.level) / self.y.at(self.level)
        self.low = self.ratio / stats.f.ppf(0.975, self.df_x, self.df_y)
        self.high = self.ratio * stats.f.ppf(0.975, self.df_y, self.df_x)

    def shown(self):
        return {"lambda": self.ratio, "low": self.low, "high": self.high, "sd_x": math.sqrt(self.x.at(self.level)),
                "sd_y": math.sqrt(self.y.at(self.level)), "df_x": self.df_x, "df_y": self.df_y,
                "model": {"growth": self.growth, "level": self.level, "x": self.x.shown(self.level),
                          "y": self.y.shown(self.level)}}


class Weighted:
    def __init__(self, x, y, error, method):
        self.x, self.y, self.n, self.error, self.method = x, y, len(x), error, method
        self.intercept, self.slope = self.line(x, y, error.ratio)

    def variances(self, level_x, level_y, ratio):
        """Of the errors of x and y where the true values are these; in the units of the method's own law."""
        if self.method == "weighted_deming":
            level = (level_x + ratio * level_y) / (1 + ratio)
            return ratio * level**2, level**2
        return self.error.x.at(level_x) * ratio / self.error.ratio, self.error.y.at(level_y)

    def weights(self, x, y, intercept, slope, ratio):
        foot = (x / ratio + slope * (y - intercept)) / (1 / ratio + slope**2)
        vx, vy = self.variances(foot, intercept + slope * foot, ratio)
        return vx, vy, 1 / (vy + slope**2 * vx)

    def line(self, x, y, ratio):
        """York et al. 2004, the variances taken anew at every pass."""
        intercept, slope = deming(x, y, ratio)
        for _ in range(200):
            vx, vy, w = self.weights(x, y, intercept, slope, ratio)
            mx, my = (w * x).sum() / w.sum(), (w * y).sum() / w.sum()
            u, v = x - mx, y - my
            beta = w * (u * vy + slope * v * vx)
            slope = (w * beta * v).sum() / (w * beta * u).sum()
            intercept = my - slope * mx
        return intercept, slope

    def covariances(self):
        """Of (intercept, slope): jackknife, and York's at the adjusted points scaled to the scatter; with what an
        uncertain ratio adds."""
        lines = np.array([self.line(np.delete(self.x, i), np.delete(self.y, i), self.error.ratio)
                          for i in range(self.n)])
        off = lines - lines.mean(axis=0)
        step = 1e-4
        turn = (np.array(self.line(self.x, self.y, self.error.ratio * math.exp(step))) -
                np.array(self.line(self.x, self.y, self.error.ratio * math.exp(-step)))) / (2 * step)
        of_ratio = np.outer(turn, turn) * (special.polygamma(1, self.error.df_y / 2) +
                                           special.polygamma(1, self.error.df_x / 2))
        vx, vy, w = self.weights(self.x, self.y, self.intercept, self.slope, self.error.ratio)
        adjusted = self.adjusted()
        mean = (w * adjusted).sum() / w.sum()
        v = 1 / (w * (adjusted - mean) ** 2).sum()
        york = np.array([[1 / w.sum() + mean**2 * v, -mean * v], [-mean * v, v]])
        return (self.n - 1) / self.n * off.T @ off + of_ratio, york * self.scale() + of_ratio

    def adjusted(self):
        vx, vy, w = self.weights(self.x, self.y, self.intercept, self.slope, self.error.ratio)
        return w * (self.x * vy + self.slope * (self.y - self.intercept) * vx)

    def scale(self):
        w = self.weights(self.x, self.y, self.intercept, self.slope, self.error.ratio)[2]
        return float((w * (self.y - self.intercept - self.slope * self.x) ** 2).sum() / (self.n - 2))

    def variance_at(self, level):
        vx, vy = self.variances(level, self.intercept + self.slope * level, self.error.ratio)
        return self.scale() * (vy + self.slope**2 * vx)

    def mean_x(self):
        w = self.weights(self.x, self.y, self.intercept, self.slope, self.error.ratio)[2]
        return float((w * self.x).sum() / w.sum())

    def scatter(self):
        x = self.mean_x()
        y = self.intercept + self.slope * x
        of_x, of_y = self.slope**2 * self.error.x.at(x), self.error.y.at(y)
        df = (of_x + of_y) ** 2 / (of_x**2 / self.error.x.df(x) + of_y**2 / self.error.y.df(y))
        ratio = self.variance_at(x) / (of_x + of_y)
        return {"observed_sd": math.sqrt(self.variance_at(x)), "expected_sd": math.sqrt(of_x + of_y),
                "variance_ratio": ratio, "p": stats.f.sf(ratio, self.n - 2, df)}

    def level(self, at, allowable):
        bias, s = self.intercept + (self.slope - 1) * at, math.sqrt(self.variance_at(at))
        single = t_quantile(0.975, self.n - 2) * s
        return {"level": at, "bias": bias, "allowable": allowable,
                "single_result": {"share_within": stats.norm.cdf((allowable - bias) / s) -
                                  stats.norm.cdf((-allowable - bias) / s),
                                  "low": bias - single, "high": bias + single}}

    def shown(self):
        return {"method": self.method, "se_method": "jackknife", "intercept": self.intercept, "slope": self.slope,
                "slope_at_lambda_low": self.line(self.x, self.y, self.error.low)[1],
                "slope_at_lambda_high": self.line(self.x, self.y, self.error.high)[1]}
