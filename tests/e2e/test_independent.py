"""What the running service shows of 60 check readings and 40 pairs equals a second computation, to 1e-8."""
import random
import sys
import unittest

import numpy as np
from scipy import odr

import independent
import independent_chart
import independent_classical
import independent_diagnosis
import independent_weighted
from harness import CONFIG, SiteTest
from plant import START, csv, rfc3339

CHARTS = {("line1", "wheat-low"): 32, ("line2", "wheat-low"): 12,  # 60 readings
          ("line1", "wheat-high"): 8, ("line2", "wheat-high"): 8}
LEVEL = {"wheat-low": 10.62, "wheat-high": 13.41}
REFERENCE = {"wheat-low": (10.62, 0.08, 2.0)}
DECISION_LEVELS = (10.5, 13.0)
PAIRS = 40
LEAST_PAIRS = 20  # below, agreement is not claimed
HOUR = 3600
TOLERANCE = 1e-8

# Six false alerts a year, shared by four charts and one comparison: 1.2 each. A chart's two scores share evenly; the
# pair chart takes half of a comparison's share, outliers a quarter. Check readings every 8 h, pairs every 2 h.
CHART_RUN_LENGTH = 365 * 3 / 0.6
PAIR_RUN_LENGTH = 365 * 12 / 0.6
OUTLIER_RUN_LENGTH = 365 * 12 / 0.3


def allowable(level):
    return max(0.2, 0.015 * abs(level))


class Mill:
    """60 check readings and 40 pairs; `check(i)` and `pair(i)` are added to line1 wheat-low and to line2's pairs."""

    def __init__(self, seed, check=lambda i, noise: noise, pair=lambda i: 0.0, round_to=0.001):
        self.random, self.round_to = random.Random(seed), round_to
        self.checks = {chart: self.readings(chart, count, check) for chart, count in CHARTS.items()}
        self.pairs = [self.split(i, pair) for i in range(PAIRS)]

    def rounded(self, value):
        return round(round(value / self.round_to) * self.round_to, 6)

    def readings(self, chart, count, check):
        place = list(CHARTS).index(chart)
        out = []
        for i in range(count):
            noise = self.random.gauss(0, 0.02)
            if chart == ("line1", "wheat-low"):
                noise = check(i, noise)
            time = START + place * 60 + i * 84 * HOUR // count
            out.append((rfc3339(time), self.rounded(LEVEL[chart[1]] + noise)))
        return out

    def split(self, i, pair):
        truth = self.random.uniform(10.0, 13.6)
        time = START + 600 + i * 2 * HOUR
        x = self.rounded(truth + self.random.gauss(0, 0.02))
        y = self.rounded(truth + 0.01 + pair(i) + self.random.gauss(0, 0.022))
        return f"S-{i:03d}", rfc3339(time), x, rfc3339(time + 300), y

    def drop_on(self, site):
        for analyzer in ("line1", "line2"):
            rows = [("check", time, "protein", standard, value)
                    for (name, standard), readings in self.checks.items() if name == analyzer
                    for time, value in readings]
            at = 1 if analyzer == "line1" else 3
            rows += [("split", p[at], "protein", p[0], p[at + 1]) for p in self.pairs]
            site.drop(analyzer, "readings.csv", csv(rows))
        site.wait_taken()


class Second(unittest.TestCase):
    """The second computation against a third one, and against printed figures."""

    def test_its_line_is_the_one_of_orthogonal_distance_regression(self):
        generator = random.Random(11)
        x = np.array([generator.uniform(10, 13.6) for _ in range(40)])
        y = 1.02 * x - 0.1 + np.array([generator.gauss(0, 0.05) for _ in range(40)])
        run = odr.ODR(odr.RealData(x, y, sx=0.03, sy=0.04), odr.unilinear, beta0=[1.0, 0.0], sstol=1e-15, partol=1e-15)
        slope, intercept = run.run().beta
        line = independent.deming(x, y, (0.03 / 0.04) ** 2)
        self.assertAlmostEqual(line[1] / slope, 1, delta=1e-7)
        self.assertAlmostEqual(line[0] / intercept, 1, delta=1e-6)

    def test_degrees_of_freedom_of_thirty_readings(self):
        self.assertAlmostEqual(independent_chart.moving_range_degrees_of_freedom(30), 17.97, delta=0.005)

    def test_limits_of_the_printed_examples(self):
        self.assertAlmostEqual(independent_chart.limit_for(independent_chart.LEVEL, 3650), 4.08, delta=0.005)
        self.assertAlmostEqual(independent_chart.limit_for(independent_chart.PRECISION, 3650), 3.62, delta=0.005)
        self.assertAlmostEqual(independent_chart.limit_for(independent_chart.PAIRS, 14600), 4.34, delta=0.005)


class Independent(SiteTest):
    def compare(self, expected, shown, where):
        """Every value of `expected`; numbers to 1e-8 of their size."""
        if isinstance(expected, dict):
            for name, value in expected.items():
                self.assertIn(name, shown, where)
                self.compare(value, shown[name], f"{where}.{name}")
        elif isinstance(expected, (list, tuple)):
            self.assertIsInstance(shown, list, where)
            self.assertEqual(len(expected), len(shown), where)
            for i, value in enumerate(expected):
                self.compare(value, shown[i], f"{where}[{i}]")
        elif expected is None or isinstance(expected, (str, bool)):
            self.assertEqual(shown, expected, where)
        else:
            self.assertIsInstance(shown, (int, float), where)
            size = max(abs(expected), abs(shown))
            nothing = size < 1e-12 and not where.endswith("p")  # what is left of readings that cancel
            apart = 0.0 if nothing or size == 0 else abs(expected - shown) / size
            self.seen.append((apart, where))
            if apart > TOLERANCE:
                self.wrong.append(f"{where}: {shown!r}, independently {float(expected)!r}, {apart:.1e} apart")

    def setUp(self):
        self.seen, self.wrong = [], []

    def report(self):
        worst = max(self.seen, default=(0.0, "nothing"))
        print(f"{len(self.seen)} numbers compared, worst {worst[0]:.1e} at {worst[1]} ... ", end="", file=sys.stderr)

    def follow(self, mill, capacity=40, decimals=3, extra="", relation=None, allowed=allowable):
        """Drops the mill on a service and compares all it shows; the independent charts and comparison."""
        config = CONFIG.format(port=0, rescan="1s", decimals=3, routes="    []")
        config = config.replace("y: line2,", f"y: line2, window: {{pairs: {capacity}}},{extra}")
        if allowed is not allowable:
            config = config.replace("allowable_difference: {absolute: 0.2, percent: 1.5}",
                                    f"allowable_difference: {{absolute: {allowed(0)}}}")
        if decimals is None:  # the smallest step seen counts
            config = config.replace("    decimals: 3\n", "")
        site = self.make_site(config=config).start()
        mill.drop_on(site)
        charts = {}
        for (analyzer, standard), readings in mill.checks.items():
            chart = independent_chart.Chart(readings, decimals, CHART_RUN_LENGTH)
            charts[analyzer, standard] = chart
            shown = site.get(f"/api/charts/{analyzer}/{standard}/protein?points=500")
            self.compare(chart.shown(REFERENCE.get(standard)), shown, f"{analyzer}/{standard}")
        shown = site.get("/api/comparisons/protein?pairs=500")
        comparison = self.compare_pairs(mill, charts, capacity, shown, relation, allowed)
        self.compare_budget(site.get("/api/status")["alarm_budget"])
        self.shown = shown
        self.report()
        self.assertEqual(self.wrong, [], "\n" + "\n".join(self.wrong))
        self.assertGreater(len(self.seen), 300)
        return charts, comparison

    def compare_budget(self, shown):
        a_year = 365 * 24
        charts = len(CHARTS) * 2 * a_year / 8 / CHART_RUN_LENGTH
        warnings, outliers = a_year / 2 / PAIR_RUN_LENGTH, a_year / 2 / OUTLIER_RUN_LENGTH
        kinds = {"check_standard_unstable": charts, "agreement_drifting": warnings, "pair_outlier": outliers,
                 "sample_scatter": outliers}
        self.compare({"false_alerts_per_year": 6.0, "expected": sum(kinds.values()), "by_kind": kinds}, shown, "budget")
        self.assertEqual(set(shown["by_kind"]), set(kinds))
        self.assertEqual(shown["apart"]["agreement_lost"]["subjects"], 1)

    def compare_pairs(self, mill, charts, capacity, shown, relation=None, allowed=allowable):
        def error_at(time):
            sides = [independent.repeatability_at([c for (name, _), c in charts.items() if name == side], time)
                     for side in ("line1", "line2")]
            return independent.ErrorRatio(*sides) if all(sides) else None
        pairs = [independent.Pair(sample, later, x, y) for sample, _, x, later, y in mill.pairs]
        folded = independent.Comparison(pairs, error_at, capacity, PAIR_RUN_LENGTH, 1 / OUTLIER_RUN_LENGTH,
                                        relation)
        window, error = folded.window(), error_at(pairs[-1].time)
        x, y = independent.xy(window)
        fit = independent.Fit(x, y, error)
        true = fit.fitted_true()
        reliability = 1 - error.sd_x**2 * (len(x) - 1) / independent_chart.rss(x)
        covered = all(true.min() <= level <= true.max() for level in DECISION_LEVELS)
        self.compare({
            "window": {"pairs": len(window), "capacity": capacity, "from": window[0].time, "to": window[-1].time},
            "error": error.shown(), "fit": fit.shown(), "scatter": fit.scatter(),
            "levels": [fit.level(level, allowed(level), LEAST_PAIRS) for level in DECISION_LEVELS],
            "difference": independent.differences(x, y, allowed),
            "relation": {"intercept": relation[0], "slope": relation[1]} if relation else None,
            "range": {"reliability_ratio": reliability, "adequate": reliability >= 0.95, "covers_levels": covered},
            "pair_chart": self.pair_chart(folded),
            "outliers": [{"sample": p.sample, "residual": p.at_arrival[0], "p": p.at_arrival[1]}
                         for p in pairs if p.outlier],
            "pairs": [{"sample": p.sample, "measured_at": p.time, "x": p.x, "y": p.y, "in_window": p in window,
                       "outlier": p.outlier, "residual": fit.of_own_pair(p) if p in window else fit.of_new_pair(p)}
                      for p in pairs]}, shown, "comparison")
        if len(folded.stretch) == capacity == len(window):  # the window has just been renewed
            self.assertEqual("curved" in shown["warnings"], independent.curvature_p(fit) < 0.01)
        self.compare(independent.concordance(x, y), shown["concordance"], "concordance")
        if len(window) >= LEAST_PAIRS:  # fewer have no rank interval
            self.compare(independent.passing_bablok(x, y), shown["robust"], "robust")
        self.compare_change(mill, charts, folded, error, shown)
        return folded

    def compare_change(self, mill, charts, folded, error, shown):
        """Who moved, and what is in doubt."""
        if folded.severity is None:
            self.compare({"diagnosis": None, "look_back": None}, shown, "comparison")
            return
        if folded.severity == "warning":
            before, after = folded.stretch[:folded.change.k], folded.stretch[folded.change.k:]
        else:
            before, after = folded.before, folded.stretch
        read = {side: [[(time, value, point["set_aside"])
                        for (time, value), point in zip(mill.checks[chart], charts[chart].points)]
                       for chart in mill.checks if chart[0] == side] for side in ("line1", "line2")}
        expected = independent_diagnosis.diagnosis(before, after, error.ratio, read["line1"], read["line2"], 0.001)
        self.compare(expected, shown["diagnosis"], "diagnosis")
        doubt = shown["look_back"]
        self.assertLessEqual(doubt["from"], shown["diagnosis"]["started_between"][0])
        known = doubt["from_is"] == "agreement_shown"
        late = [p for p in folded.pairs if p.time > doubt["from"] or not known]
        self.compare({"pairs": len(late), "samples": [p.sample for p in late], "to": folded.pairs[-1].time},
                     doubt, "look_back")

    @staticmethod
    def pair_chart(folded):
        out = {"pairs": len(folded.stretch), "score": folded.change.score if folded.change else None,
               "limit": folded.warning_limit, "critical_limit": folded.critical_limit,
               "in_control_run_length": folded.warning, "severity": folded.severity,
               "against": "established_line" if folded.relation else "own_line"}
        if folded.severity == "warning":
            first, last = folded.change.between
            out.update(state="unstable", started_at=folded.stretch[folded.change.k].time,
                       started_between=[folded.stretch[first].time, folded.stretch[last].time])
        elif folded.severity is None:
            out.update(state="stable", started_at=None, started_between=None)
        return out

    def test_calm_readings(self):
        charts, comparison = self.follow(Mill(seed=1))
        self.assertEqual(charts["line1", "wheat-low"].unstable, None)
        self.assertEqual(comparison.severity, None)

    def test_a_classical_chart(self):
        charts = "charts: {method: classical, baseline: 15, ewma: {weight: 0.2, width: 2.86}, " \
                 "cusum: {allowance: 0.5, limit: 5}, run_rules: [{same_side: 9}, {trend: 6}, " \
                 "{two_of_three_beyond: 2}, {four_of_five_beyond: 1}]}"
        config = CONFIG.format(port=0, rescan="1s", decimals=3, routes="    []")
        config = config.replace("expanded_uncertainty: 0.08", "expanded_uncertainty: 0.08, " + charts)
        mill = Mill(seed=9, check=lambda i, noise: noise + (0.05 if i >= 22 else 0) + (0.12 if i == 17 else 0))
        site = self.make_site(config=config).start()
        mill.drop_on(site)
        chart = independent_classical.Chart(mill.checks["line1", "wheat-low"], 15, (0.2, 2.86), (0.5, 5))
        shown = site.get("/api/charts/line1/wheat-low/protein?points=500")
        self.compare(chart.shown(), shown, "line1/wheat-low")
        told = {name for point in chart.points for name in point["signals"]}
        self.assertLessEqual({"above_limit", "moving_range_above_limit", "ewma", "cusum", "four_of_five_beyond"}, told)
        # Printed: EWMA 0.2/2.86 with exact limits 365.9; cumulative sum 0.5/5 465.4.
        self.assertAlmostEqual(shown["run_length"]["ewma"], 365.9, delta=0.05)
        self.assertAlmostEqual(shown["run_length"]["cusum"], 465.4, delta=0.05)
        self.assertLess(shown["expected_run_length"], shown["run_length"]["known_parameters"])
        self.report()
        self.assertEqual(self.wrong, [], "\n" + "\n".join(self.wrong))
        # The other check standard keeps its method, and its share of the alarm budget.
        other = site.get("/api/charts/line1/wheat-high/protein")
        self.assertEqual(other["method"], "change_point")
        self.assertAlmostEqual(other["change"]["in_control_run_length"] / CHART_RUN_LENGTH, 1, delta=1e-9)

    def test_a_window_of_the_newest_thirty_pairs(self):
        _, comparison = self.follow(Mill(seed=1), capacity=30)
        self.assertEqual((len(comparison.window()), len(comparison.stretch)), (30, PAIRS))

    def test_a_lasting_step_of_a_check_standard(self):
        charts, _ = self.follow(Mill(seed=2, check=lambda i, noise: noise + (0.08 if i >= 20 else 0)))
        self.assertIn(charts["line1", "wheat-low"].unstable[0], ("shift", "single_reading"))

    def test_a_step_that_ends_is_set_aside(self):
        charts, _ = self.follow(Mill(seed=3, check=lambda i, noise: noise + (0.15 if 14 <= i < 18 else 0)))
        self.assertEqual(charts["line1", "wheat-low"].unstable, None)
        points = charts["line1", "wheat-low"].points
        self.assertEqual([i for i, p in enumerate(points) if p["set_aside"]], [14, 15, 16, 17])

    def test_doubtful_precision(self):
        charts, _ = self.follow(Mill(seed=4, check=lambda i, noise: noise * (6 if i >= 18 else 1)))
        self.assertEqual(charts["line1", "wheat-low"].unstable[0], "scatter")

    def test_coarse_readings_without_configured_decimals(self):
        self.follow(Mill(seed=5, round_to=0.02), decimals=None)

    def test_a_small_step_of_the_pairs(self):
        _, comparison = self.follow(Mill(seed=24, pair=lambda i: 0.07 if i >= 30 else 0.0))
        self.assertEqual(comparison.severity, "warning")

    def test_a_large_step_of_the_pairs(self):
        _, comparison = self.follow(Mill(seed=7, pair=lambda i: 0.12 if i >= 24 else 0.0))
        self.assertEqual(comparison.severity, "critical")

    def test_a_step_of_line1_that_its_check_standard_shows(self):
        step = 0.12
        _, comparison = self.follow(Mill(seed=9, check=lambda i, noise: noise - (step if i >= 19 else 0),
                                         pair=lambda i: step if i >= 24 else 0.0))
        self.assertEqual(comparison.severity, "critical")

    def test_pairs_that_keep_to_an_established_line(self):
        _, comparison = self.follow(Mill(seed=1), extra=" relation: {intercept: 0.01, slope: 1.0},", relation=(0.01, 1.0))
        self.assertEqual(comparison.severity, None)

    def test_pairs_that_leave_an_established_line_a_little(self):
        mill = Mill(seed=24, pair=lambda i: -0.01 + (0.055 if i >= 30 else 0.0))
        _, comparison = self.follow(mill, extra=" relation: identity,", relation=(0.0, 1.0))
        self.assertEqual(comparison.severity, "warning")

    def test_pairs_that_leave_an_established_line(self):
        mill = Mill(seed=7, pair=lambda i: 0.12 if i >= 24 else 0.0)
        _, comparison = self.follow(mill, extra=" relation: identity,", relation=(0.0, 1.0))
        self.assertEqual(comparison.severity, "critical")

    def test_a_curved_relation(self):
        mill = Mill(seed=9)
        mill.pairs = [(s, t, x, later, mill.rounded(y + 0.03 * (x - 11.8) ** 2)) for s, t, x, later, y in mill.pairs]
        self.follow(mill)
        self.assertIn("curved", self.shown["warnings"])

    def test_what_would_prove_agreement(self):
        self.follow(Mill(seed=1), allowed=lambda level: 0.02, extra=" prove_within: 10h,")
        proof, levels = self.shown["proof"], self.shown["levels"]
        self.assertTrue(proof["overdue"])
        self.assertEqual(proof["aim"], "agreement_shown")
        self.assertEqual(proof["more_pairs"], independent.pairs_to_agreement(levels, PAIRS))
        level = next(v for v in levels if v["level"] == proof["level"])
        factor = proof["sd_needed"] / proof["residual_sd"]
        self.assertAlmostEqual(independent.chance_of_agreement(level, factor, PAIRS), 0.9, delta=1e-7)

    def test_one_gross_pair(self):
        _, comparison = self.follow(Mill(seed=8, pair=lambda i: 1.5 if i == 25 else 0.0))
        self.assertEqual([p.sample for p in comparison.pairs if p.outlier], ["S-025"])

    def follow_growing(self, growth, settings, method):
        """Errors that grow with the level: the line, its errors and what rests on them, of the last pair."""
        mill = Mill(seed=31)
        config = CONFIG.format(port=0, rescan="1s", decimals=3, routes="    []")
        site = self.make_site(config=config.replace("y: line2,", f"y: line2, {settings},")).start()
        mill.drop_on(site)
        last = mill.pairs[-1][3]
        sides = {"line1": [], "line2": []}
        for (analyzer, _), readings in mill.checks.items():
            points = [p for p in independent_chart.Chart(readings, 3, CHART_RUN_LENGTH).points if p["time"] <= last]
            sides[analyzer].append(points[-1]["repeatability"] + (points[-1]["level"],))
        error = independent_weighted.Error(growth, sides["line1"], sides["line2"])
        x, y = (np.array([p[i] for p in mill.pairs]) for i in (2, 4))
        fit = independent_weighted.Weighted(x, y, error, method)
        shown = site.get("/api/comparisons/protein?pairs=500")
        self.assertEqual(shown["window"]["pairs"], PAIRS)
        self.compare({"error": error.shown(), "fit": fit.shown(), "scatter": fit.scatter(),
                      "levels": [fit.level(level, allowable(level)) for level in DECISION_LEVELS]}, shown, growth)
        self.report()
        self.assertEqual(self.wrong, [], "\n" + "\n".join(self.wrong))
        # Standard errors come from a jackknife that is as good as n refits to 0.2 %.
        jackknife, york = fit.covariances()
        for name, expected in (("se_intercept", jackknife[0, 0]), ("se_slope", jackknife[1, 1]),
                               ("analytic_se_intercept", york[0, 0]), ("analytic_se_slope", york[1, 1])):
            self.assertAlmostEqual(shown["fit"][name] / expected**0.5, 1, delta=2e-3, msg=name)
        self.assertAlmostEqual(shown["fit"]["cov"] / jackknife[0, 1], 1, delta=4e-3)
        for level in shown["levels"]:
            design = np.array([1.0, level["level"]])
            se = float(design @ jackknife @ design) ** 0.5
            self.assertAlmostEqual(level["se"] / se, 1, delta=2e-3)
            self.assertAlmostEqual(level["high"] - level["bias"],
                                   independent_chart.t_quantile(0.95, PAIRS - 2) * level["se"], delta=1e-9)

    def test_errors_proportional_to_the_level(self):
        self.follow_growing("proportional", "error_model: proportional", "york")

    def test_weighted_deming(self):
        self.follow_growing("proportional", "fit: weighted_deming", "weighted_deming")

    def test_errors_with_a_constant_and_a_growing_part(self):
        self.follow_growing("mixed", "error_model: mixed", "york")

    def test_runs_of_replicates_and_an_intervention(self):
        generator = random.Random(31)
        rows, runs, before, after = [], [], [], []
        for i in range(36):
            of_run = 10.62 + generator.gauss(0, 0.02)
            runs.append([round(of_run + generator.gauss(0, 0.02), 3) for _ in range(3)])
            rows += [("check", rfc3339(START + i * HOUR), "protein", "wheat-low", value, k)
                     for k, value in enumerate(runs[-1])]
            for values, time in ((before, START + i * HOUR), (after, START + (i + 40) * HOUR)):
                values.append(round(13.41 + (0.03 if values is after else 0) + generator.gauss(0, 0.02), 3))
                rows.append(("check", rfc3339(time), "protein", "wheat-high", values[-1], 0))
        rows.append(("intervention", rfc3339(START + 38 * HOUR), "", "recalibrated", "", ""))
        site = self.make_site(config=CONFIG.format(port=0, rescan="1s", decimals=3, routes="    []")).start()
        for analyzer, of_runs in (("line1", False), ("line2", True)):  # what is done to line1 leaves line2's stretch alone
            own = [row for row in rows if (row[3] == "wheat-low") == of_runs]
            site.drop(analyzer, "readings.csv", csv(own).replace("item,value", "item,value,replicate"))
            site.wait_taken()
        expected = independent_chart.runs_of_replicates(runs, CHART_RUN_LENGTH)
        self.compare(expected, site.get("/api/charts/line2/wheat-low/protein?points=500"), "runs")
        shown = site.get("/api/charts/line1/wheat-high/protein")
        effect = independent_chart.effect(before, after)
        self.compare({**effect, "what": "recalibrated", "allowable": allowable(np.mean(before))},
                     shown["intervention_effect"], "effect")
        self.compare(effect, shown["since_first"], "since_first")
        self.assertEqual(self.wrong, [], "\n" + "\n".join(self.wrong))
