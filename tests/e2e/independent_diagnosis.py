"""Which analyzer moved, computed a second way: numpy for the shifts, scipy's normal density for the explanations."""
import numpy as np
from scipy import stats

import independent


def widened(variance, df):
    return variance * df / (df - 2)


def pair_shift(before, after, ratio):
    """Shift of y - slope x, its standard error, and the slope common to both sides."""
    delta = 1 / ratio
    sides = [independent.xy(side) for side in (before, after)]
    (xb, yb), (xa, ya) = sides
    x = np.concatenate([x - x.mean() for x, _ in sides])
    y = np.concatenate([y - y.mean() for _, y in sides])
    sxx, sxy, syy = x @ x, x @ y, y @ y
    slope = (syy - delta * sxx + np.hypot(syy - delta * sxx, 2 * np.sqrt(delta) * sxy)) / (2 * sxy)
    df = len(x) - 3
    s2 = (y - slope * x) @ (y - slope * x) / df
    # Fuller (1987), theorem 1.3.1, of len(x) - 1 pairs about one mean.
    error, true = s2 / (delta + slope**2), (sxy / slope) / (len(x) - 2)
    of_slope = (true * s2 + delta * error**2) / ((len(x) - 2) * true**2)
    step_x = xa.mean() - xb.mean()
    variance = s2 * (1 / len(xb) + 1 / len(xa)) + step_x**2 * of_slope
    return ya.mean() - yb.mean() - slope * step_x, np.sqrt(widened(variance, df)), slope


def check_shift(charts, start, resolution):
    """Of one analyzer; `charts` are lists of (time, value, set aside)."""
    found = []
    for readings in charts:
        before = np.array([v for t, v, aside in readings if t < start and not aside])
        after = np.array([v for t, v, _ in readings if t >= start])
        df = max(0, len(before) - 1) + max(0, len(after) - 1)
        if len(before) < 2 or len(after) < 1 or df < 3:
            continue
        rss = sum(((side - side.mean()) ** 2).sum() for side in (before, after))
        variance = widened(max(rss / df, resolution**2 / 12), df) * (1 / len(before) + 1 / len(after))
        found.append((after.mean() - before.mean(), variance))
    if not found:
        return None
    weights = np.array([1 / variance for _, variance in found])
    return weights @ np.array([shift for shift, _ in found]) / weights.sum(), 1 / np.sqrt(weights.sum())


def probabilities(pairs, x, y):
    shift, se, slope = pairs
    tau = max(abs(shift), 2 * se)
    estimates = [e for e in (x, y, (shift, se)) if e is not None]
    rows = [i for i, e in enumerate((x, y, pairs)) if e is not None]
    value = np.array([e[0] for e in estimates])
    noise = np.diag([e[1] ** 2 for e in estimates])
    moved = {"x": [[1, 0, -slope]], "y": [[0, 1, 1]], "both": [[1, 0, -slope], [0, 1, 1]], "neither": [[0, 0, 1]]}
    density = {}
    for name, columns in moved.items():
        columns = np.array(columns)[:, rows]
        density[name] = stats.multivariate_normal.logpdf(value, cov=noise + tau**2 * columns.T @ columns)
    largest = max(density.values())
    whole = sum(np.exp(d - largest) for d in density.values())
    return {name: float(np.exp(d - largest) / whole) for name, d in density.items()}


def diagnosis(before, after, ratio, charts_x, charts_y, resolution):
    start = after[0].time
    pairs = pair_shift(before, after, ratio)
    x, y = (check_shift(charts, start, resolution) for charts in (charts_x, charts_y))
    chance = probabilities(pairs, x, y)
    best = max(chance, key=chance.get)
    return {"moved": best if chance[best] >= 0.9 else "undecided", "probability": chance[best], "probabilities": chance,
            "shift_pairs": pairs[0], "se_shift_pairs": pairs[1], "started_at": start,
            "shift_x": x and x[0], "se_shift_x": x and x[1], "shift_y": y and y[0], "se_shift_y": y and y[1],
            "pairs_before": len(before), "pairs_after": len(after)}
