"""Makes proof_power.csv: powers of agreement computed independently of the service, in numpy and scipy.

    /usr/bin/python3 power_reference.py > proof_power.csv

Rows `one`: two one-sided 5 % tests with an estimated standard error, by Owen's Q functions as defined (D. B. Owen,
Biometrika 52 (1965) 437): allowable, bias, standard error, degrees of freedom, power.
Rows `all`: the 90 % intervals of all decision levels inside at once, for a Deming line through n pairs (Fuller 1987,
theorem 1.3.1, for the moments to be expected; residual sd chi-distributed on n-2): levels 10.5 and 13.0, allowable
0.1, samples evenly from 9 to 15 in 101 values; sd of x, sd of y, bias, n, power. For each residual sd a rectangle of the
bivariate normal distribution of the two biases.
"""
import numpy as np
from scipy import integrate, special, stats


def owen_q(df, t, delta, upper):
    log_c = 0.5 * np.log(2 * np.pi) - special.gammaln(df / 2) - (df - 2) / 2 * np.log(2)

    def f(x):
        return np.exp(log_c + (df - 1) * np.log(x) + stats.norm.logpdf(x)) * special.ndtr(t * x / np.sqrt(df) - delta)

    middle = min(upper, np.sqrt(df))
    return sum(integrate.quad(f, a, b, epsabs=1e-12, epsrel=1e-11, limit=200)[0]
               for a, b in ((0, middle), (middle, min(upper, np.sqrt(df) + 20))) if a < b)


def one(allowable, bias, se, df):
    t = stats.t.ppf(0.95, df)
    upper, lower = (bias + allowable) / se, (bias - allowable) / se
    end = (upper - lower) * np.sqrt(df) / (2 * t)
    return owen_q(df, -t, lower, end) - owen_q(df, t, upper, end)


def both(sd_x, sd_y, bias, n, levels=(10.5, 13.0), allowable=0.1):
    values = np.linspace(9, 15, 101)
    spread, mean = values.var(), values.mean()
    delta = sd_y**2 / sd_x**2
    s_vv = sd_y**2 + sd_x**2
    s_uu = s_vv / (delta + 1)
    v_slope = (spread * s_vv + delta * s_uu**2) / ((n - 1) * spread**2)
    off = np.array(levels) - mean
    cov = s_vv / n + np.outer(off, off) * v_slope
    se = np.sqrt(np.diag(cov))
    t, df = stats.t.ppf(0.95, n - 2), n - 2

    def rectangle(u):
        room = allowable - t * u * se
        if (room <= 0).any():
            return 0.0
        return stats.multivariate_normal([bias] * 2, cov, allow_singular=True).cdf(room, lower_limit=-room)

    def f(u):
        return 2 * u * df * stats.chi2.pdf(df * u * u, df) * rectangle(u)

    # One normal for the error of the slope, given it the other bias is known but for the mean's error: the same
    # rectangle in one dimension, to more digits than the library's bivariate integral has.
    def exact(u):
        room = allowable - t * u * se
        if (room <= 0).any():
            return 0.0
        sd1, rho = se[0], cov[0, 1] / (se[0] * se[1])
        sd2 = se[1] * np.sqrt(1 - rho**2)

        def g(z):
            m = bias + rho * se[1] * z
            return stats.norm.pdf(z) * (special.ndtr((room[1] - m) / sd2) - special.ndtr((-room[1] - m) / sd2))

        a, b = (-room[0] - bias) / sd1, (room[0] - bias) / sd1
        value = integrate.quad(g, max(a, -9), min(b, 9), epsabs=1e-11, limit=200)[0] if a < 9 and b > -9 else 0.0
        assert abs(value - rectangle(u)) < 2e-5
        return value

    end = min(1 + 9 / np.sqrt(2 * df), (allowable / (t * se)).min())
    start = max(0.0, 1 - 9 / np.sqrt(2 * df))
    nodes, weights = np.polynomial.legendre.leggauss(120)
    u = (start + end) / 2 + (end - start) / 2 * nodes
    return sum(w * 2 * x * df * stats.chi2.pdf(df * x * x, df) * exact(x) for w, x in zip(weights, u)) * (end - start) / 2


print("# By power_reference.py beside this file.")
print("row,a,b,c,d,power")
for allowable, bias, se, df in [(1, 0, 0.3, 10), (1, 0, 0.3, 3), (1, 0.4, 0.3, 18), (1, 0, 0.55, 28), (1, -0.7, 0.15, 198),
                                (0.1, 0.02, 0.03, 38), (1, 1, 0.2, 20), (1, 0, 0.05, 2), (1, 0, 0.3, 1), (2, 0.5, 0.4, 998)]:
    print(f"one,{allowable},{bias},{se},{df},{one(allowable, bias, se, df):.10f}")
for sd_x, sd_y, bias, n in [(0.1, 0.1, 0, 40), (0.1, 0.1, 0.03, 60), (0.2, 0.1, 0, 60), (0.15, 0.15, -0.02, 100),
                            (0.3, 0.3, 0, 60), (0.02, 0.02, 0, 22)]:
    print(f"all,{sd_x},{sd_y},{bias},{n},{both(sd_x, sd_y, bias, n):.10f}")
# Least even totals n with 80 % power in a two-period crossover on the log scale (two one-sided tests, n - 2 degrees of
# freedom, limits ln 0.8 and ln 1.25): E. Diletti, D. Hauschke, V. W. Steinijans, Int. J. Clin. Pharmacol. Ther.
# Toxicol. 29 (1991) 1, table for 80 %; printed as coefficient of variation, ratio of means, n.
for cv in (5, 7.5, 10, 12.5, 15, 17.5, 20, 22.5, 25, 27.5, 30):
    for ratio in (1.0, 0.95):
        sd = np.sqrt(np.log(1 + (cv / 100)**2))
        n = 4
        while one(np.log(1.25), np.log(ratio), sd * np.sqrt(2 / n), n - 2) < 0.8:
            n += 2
        print(f"crossover,{cv},{ratio},{n},{n - 2},{one(np.log(1.25), np.log(ratio), sd * np.sqrt(2 / n), n - 2):.10f}")
