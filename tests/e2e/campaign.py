"""What Harrow Mill's two analyzers drop in forty days, with everything in it that a file may hold: check standards, split
samples, interventions, voids with and without a correction, conflicts, bad rows, censored results, repeated and unusable
files; as CSV, JSON lines and JSON arrays. Line2 drifts in the last ten days."""
import json

import harness  # it knows where plant is
from plant import HEADER, Plant, csv

SHIFTS = 120


def as_objects(rows):
    names = HEADER.split(",")
    return [{name: value for name, value in zip(names, row) if value != ""} for row in rows]


def written(rows, number):
    """(ending, text) in one of the three syntaxes."""
    if number % 3 == 0:
        return ".csv", csv(rows)
    if number % 3 == 1:
        return ".jsonl", "".join(json.dumps(o) + "\n" for o in as_objects(rows))
    return ".json", json.dumps(as_objects(rows))


def specials(i, before):
    """Rows that are not simply new results. `before`: the rows of the shift before."""
    rows = []
    if i % 17 == 5:
        rows.append(("check", "yesterday", "protein", "wheat-low", 10.6))
    if i % 19 == 7:
        rows.append(("intervention", before[0][1], "", "noted", ""))
    if i == 50:
        rows.append(("intervention", before[-1][1], "protein", "consumable_changed", ""))
    first = next(r for r in before if r[0] == "check")
    split = next(r for r in before if r[0] == "split")
    if i % 13 == 4:  # taken back and put right
        rows += [("void", *first[1:4], ""), (*first[:4], round(first[4] + 0.013, 3))]
    if i % 26 == 17:  # taken back
        rows.append(("void", *split[1:4], ""))
    if i % 23 == 9:  # a conflict
        rows.append((*split[:4], round(split[4] + 0.1, 3)))
    if i % 11 == 3:
        rows.append(("split", split[1], "protein", f"C-{i:05d}", "<0.05"))
    return rows


def files(shifts=SHIFTS):
    """(analyzer, name, text) in the order in which they are dropped."""
    plant = Plant(seed=5, drift=lambda hours: max(0.0, (hours - 30 * 24) * 0.0025))
    before = {}
    for i in range(shifts):
        checks, splits = plant.checks(i, 1), plant.splits(i * 4, 4)
        for number, analyzer in enumerate(checks):
            rows = sorted(checks[analyzer] + splits[analyzer], key=lambda r: r[1])
            extra = specials(i, before[analyzer]) if i else []
            before[analyzer] = rows
            ending, text = written(rows + extra, i + number)
            yield analyzer, f"shift-{i:03d}{ending}", text
            if i % 29 == 28:
                yield analyzer, f"again-{i:03d}{ending}", text
            if i % 31 == 30:
                yield analyzer, f"noise-{i:03d}.csv", bytes(range(256)) + b"\n"
