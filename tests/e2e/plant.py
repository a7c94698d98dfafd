"""Invented readings of Harrow Mill, the same for the same seed."""
import random

from harness import rfc3339

START = 1767592800  # 2026-01-05T06:00:00Z
CHECK_EVERY = 8 * 3600
PAIR_EVERY = 2 * 3600


class Plant:
    """Two analyzers on one product. `drift(hours)` is what line2 reads too high after so many hours."""

    def __init__(self, seed=1, sd1=0.02, sd2=0.022, offset2=0.01, drift=lambda hours: 0.0, decimals=3):
        self.random = random.Random(seed)
        self.sd = {"line1": sd1, "line2": sd2}
        self.offset2, self.drift, self.decimals = offset2, drift, decimals

    def read(self, analyzer, truth, hours):
        extra = self.offset2 + self.drift(hours) if analyzer == "line2" else 0.0
        return round(truth + extra + self.random.gauss(0, self.sd[analyzer]), self.decimals)

    def checks(self, first, count):
        """Rows by analyzer: `count` check rounds from the `first` on, both standards on both analyzers."""
        rows = {"line1": [], "line2": []}
        for i in range(first, first + count):
            at = START + i * CHECK_EVERY
            for analyzer, shift in (("line1", 0), ("line2", 60)):
                for standard, truth in (("wheat-low", 10.62), ("wheat-high", 13.41)):
                    value = self.read(analyzer, truth, i * CHECK_EVERY / 3600)
                    rows[analyzer].append(("check", rfc3339(at + shift), "protein", standard, value))
        return rows

    def splits(self, first, count):
        rows = {"line1": [], "line2": []}
        for i in range(first, first + count):
            at = START + 600 + i * PAIR_EVERY
            truth = self.random.uniform(10.0, 13.6)
            for analyzer, shift in (("line1", 0), ("line2", 300)):
                value = self.read(analyzer, truth, i * PAIR_EVERY / 3600)
                rows[analyzer].append(("split", rfc3339(at + shift), "protein", f"S-{i:05d}", value))
        return rows
