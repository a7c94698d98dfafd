"""Invented readings of Harrow Mill, the same for the same seed. Used by the demo and by the end-to-end tests."""
import random
import time

START = 1767592800  # 2026-01-05T06:00:00Z
CHECK_EVERY = 8 * 3600
PAIR_EVERY = 2 * 3600
HEADER = "kind,measured_at,measurand,item,value"


def rfc3339(epoch_s):
    """Seconds since 1970, to the millisecond."""
    ms = int(round(epoch_s * 1000))
    return time.strftime("%Y-%m-%dT%H:%M:%S", time.gmtime(ms // 1000)) + f".{ms % 1000:03d}Z"


def csv(rows):
    """A drop file in the plain format."""
    return "\n".join([HEADER] + [",".join(str(c) for c in row) for row in rows]) + "\n"


PROTEIN = {"measurand": "protein", "wheat-low": 10.62, "wheat-high": 13.41, "from": 10.0, "to": 13.6}
MOISTURE = {"measurand": "moisture", "wheat-low": 13.1, "wheat-high": 14.9, "from": 12.8, "to": 15.2}


class Plant:
    """Two analyzers on one product. `drift(hours)` is what line2 reads too high so many hours after `start`."""

    def __init__(self, seed=1, product=PROTEIN, start=START, sd1=0.02, sd2=0.022, offset2=0.01, drift=lambda hours: 0.0,
                 decimals=3):
        self.random = random.Random(seed)
        self.product, self.start = product, start
        self.sd = {"line1": sd1, "line2": sd2}
        self.offset2, self.drift, self.decimals = offset2, drift, decimals

    def read(self, analyzer, truth, hours):
        extra = self.offset2 + self.drift(hours) if analyzer == "line2" else 0.0
        return round(truth + extra + self.random.gauss(0, self.sd[analyzer]), self.decimals)

    def checks(self, first, count):
        """Rows by analyzer: `count` check rounds from the `first` on, both standards on both analyzers."""
        rows = {"line1": [], "line2": []}
        for i in range(first, first + count):
            at = self.start + i * CHECK_EVERY
            for analyzer, shift in (("line1", 0), ("line2", 60)):
                for standard in ("wheat-low", "wheat-high"):
                    value = self.read(analyzer, self.product[standard], i * CHECK_EVERY / 3600)
                    rows[analyzer].append(("check", rfc3339(at + shift), self.product["measurand"], standard, value))
        return rows

    def splits(self, first, count):
        """Rows by analyzer: `count` split samples from the `first` on."""
        rows = {"line1": [], "line2": []}
        for i in range(first, first + count):
            at = self.start + 600 + i * PAIR_EVERY
            truth = self.random.uniform(self.product["from"], self.product["to"])
            for analyzer, shift in (("line1", 0), ("line2", 300)):
                value = self.read(analyzer, truth, i * PAIR_EVERY / 3600)
                rows[analyzer].append(("split", rfc3339(at + shift), self.product["measurand"], f"S-{i:05d}", value))
        return rows
