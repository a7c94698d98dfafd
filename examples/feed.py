"""Harrow Mill at work: four weeks of history, then a live feed in which line2's lamp wears out.

feed.py DIR history   writes the history into DIR/drop at once
feed.py DIR live      goes on from there, a shift every two seconds until it has caught up with the clock (four calm
                      days, eight days of drift), then a round every ten seconds
"""
import itertools
import os
import pathlib
import sys
import time

from plant import CHECK_EVERY, MOISTURE, PAIR_EVERY, PROTEIN, Plant, csv, rfc3339

HISTORY_SHIFTS = 28 * 3
LIVE_SHIFTS = 12 * 3
CALM_SHIFTS = 4 * 3
SECONDS_A_SHIFT = 2.0
DRIFT_A_DAY = 0.06  # g/100 g of protein
SHIFT = CHECK_EVERY
PAIRS_A_SHIFT = SHIFT // PAIR_EVERY


def drift(hours):
    return max(0.0, hours / 24 - (HISTORY_SHIFTS + CALM_SHIFTS) / 3) * DRIFT_A_DAY


def plants(start):
    return [Plant(seed=1, product=PROTEIN, start=start, drift=drift), Plant(seed=2, product=MOISTURE, start=start)]


def drop(folder, analyzer, name, rows):
    """Beside the inbox first, then renamed in: the service never sees half a file."""
    temporary = folder / f".{analyzer}-{name}"
    temporary.write_text(csv(sorted(rows, key=lambda row: row[1])))
    os.rename(temporary, folder / "drop" / analyzer / name)


def shift_rows(mill, i):
    """What both analyzers measure in shift `i`."""
    rows = {"line1": [], "line2": []}
    for plant in mill:
        for part in (plant.checks(i, 1), plant.splits(i * PAIRS_A_SHIFT, PAIRS_A_SHIFT)):
            for analyzer in rows:
                rows[analyzer] += part[analyzer]
    return rows


def round_now(mill, i):
    """One check standard and one split sample on both analyzers, as of now."""
    rows = {"line1": [], "line2": []}
    now = time.time()
    for plant in mill:
        truth = plant.random.uniform(plant.product["from"], plant.product["to"])
        hours = (now - plant.start) / 3600
        for analyzer in rows:
            for kind, item, value in (("check", "wheat-low", plant.product["wheat-low"]), ("split", f"N-{i:05d}", truth)):
                reading = plant.read(analyzer, value, hours)
                rows[analyzer].append((kind, rfc3339(now), plant.product["measurand"], item, reading))
    return rows


def main():
    folder, what = pathlib.Path(sys.argv[1]), sys.argv[2]
    start_file = folder / ".start"
    if what == "history":
        start = int(time.time()) - (HISTORY_SHIFTS + LIVE_SHIFTS) * SHIFT - 1800
        start_file.write_text(str(start))
    mill = plants(int(start_file.read_text()))
    for i in range(HISTORY_SHIFTS):  # the live feed draws the same numbers again to go on where history ended
        rows = shift_rows(mill, i)
        if what == "history":
            for analyzer in rows:
                drop(folder, analyzer, f"shift-{i:04d}.csv", rows[analyzer])
    if what == "history":
        return
    for i in range(HISTORY_SHIFTS, HISTORY_SHIFTS + LIVE_SHIFTS):
        time.sleep(SECONDS_A_SHIFT)
        rows = shift_rows(mill, i)
        for analyzer in rows:
            drop(folder, analyzer, f"shift-{i:04d}.csv", rows[analyzer])
    for i in itertools.count():  # the clock is reached: from here on what is measured now
        time.sleep(10)
        rows = round_now(mill, i)
        for analyzer in rows:
            drop(folder, analyzer, f"now-{i:05d}.csv", rows[analyzer])


if __name__ == "__main__":
    try:
        main()
    except (KeyboardInterrupt, BrokenPipeError):
        pass
