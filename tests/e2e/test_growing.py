"""Exports that an analyzer keeps appending to: read on from where they were left, whatever happens to the file."""
import os
import shutil
import time

from harness import CONFIG, SiteTest, wait_until
from plant import HEADER, START, csv, rfc3339

ALL_KNOWN = {"accepted": 0, "repeated": 0, "rejected": 0, "voided": 0, "censored": 0}


def line(i, value=None):
    return f"check,{rfc3339(START + i * 3600)},protein,wheat-low,{round(10.6 + i / 1000, 3) if value is None else value}\n"


class Growing(SiteTest):
    def setUp(self):
        config = CONFIG.format(port=0, rescan="1s", decimals=2, routes="    []")
        self.site = self.make_site(config=config.replace("line1: {inbox", "line1: {mode: growing, inbox")).start()
        self.export = self.site.inbox("line1") / "export.csv"

    def readings(self):
        return self.site.get("/api/status")["intake"]["readings"]

    def inbox(self):
        return self.site.get("/api/status")["analyzers"][0]["inbox"]

    def append(self, text, path=None):
        with open(path or self.export, "a") as file:
            file.write(text)

    def wait_for(self, accepted, **others):
        wait_until(lambda: self.readings()["accepted"] >= accepted and self.inbox()["pending"] == 0, f"{accepted} readings are taken in")
        self.assertEqual(self.readings(), {**ALL_KNOWN, "accepted": accepted, **others})

    def settle(self):
        """Until every change was looked at and a scan has passed."""
        wait_until(lambda: self.inbox()["pending"] == 0, "nothing waits")
        seen = self.site.get("/api/status")["at"]
        wait_until(lambda: self.site.get("/api/status")["at"] > seen and self.inbox()["pending"] == 0, "a scan passes")

    def values(self):
        return [p["value"] for p in self.site.get("/api/charts/line1/wheat-low/protein?points=500")["points"]]

    def restart(self, meanwhile=lambda: None):
        self.site.kill()
        meanwhile()
        self.site.start()

    def test_each_append_is_read_on_and_the_file_stays(self):
        self.append(HEADER + "\n" + line(0))
        self.wait_for(1)
        for i in range(1, 6):
            self.append(line(i))
            self.wait_for(i + 1)
        self.assertEqual([p.name for p in self.site.inbox("line1").iterdir()], ["export.csv"])
        self.assertEqual(self.inbox()["growing"], [{"file": "export.csv", "taken_bytes": self.export.stat().st_size, "unfinished_bytes": 0}])
        self.assertEqual(self.site.get("/api/status")["intake"]["files"], {"done": 0, "repeated": 0, "rejected": 0})

    def test_a_writer_that_keeps_the_file_open(self):
        with open(self.export, "w") as file:
            for i in range(5):
                file.write((HEADER + "\n" if i == 0 else "") + line(i))
                file.flush()
                self.wait_for(i + 1)

    def test_half_a_line_waits_for_its_end(self):
        self.append(HEADER + "\n" + line(0) + line(1)[:-5])
        self.wait_for(1)
        self.settle()
        self.assertEqual(self.readings()["accepted"], 1)
        self.assertEqual(self.inbox()["growing"][0]["unfinished_bytes"], len(line(1)) - 5)
        self.append(line(1)[-5:])
        self.wait_for(2)
        self.assertEqual(self.values(), [10.6, 10.601])

    def test_a_restart_reads_nothing_again(self):
        self.append(HEADER + "\n" + line(0) + line(1))
        self.wait_for(2)
        self.restart()
        self.settle()
        self.assertEqual(self.readings(), {**ALL_KNOWN, "accepted": 2})
        self.restart(lambda: self.append(line(2)))
        self.wait_for(3)

    def test_rotation_under_another_name_and_an_export_begun_anew(self):
        self.append(HEADER + "\n" + line(0) + line(1))
        self.wait_for(2)
        old = self.export.with_name("export.1.csv")
        os.rename(self.export, old)
        self.append(line(2), old)  # its writer had it open still
        self.append(HEADER + "\n" + line(3))
        self.wait_for(4)
        self.append(line(4))
        self.wait_for(5)
        # While the service was away, too.
        self.restart(lambda: (os.rename(old, self.export.with_name("export.2.csv")), os.rename(self.export, old),
                              self.append(HEADER + "\n" + line(5))))
        self.wait_for(6)
        self.assertEqual(sorted(p.name for p in self.site.inbox("line1").iterdir()), ["export.1.csv", "export.2.csv", "export.csv"])

    def test_rotation_to_a_name_that_is_not_read(self):
        self.append(HEADER + "\n" + line(0))
        self.wait_for(1)
        old = self.export.with_name("export.csv~")
        self.append(line(1))
        os.rename(self.export, old)
        self.append(line(2), old)
        self.append(HEADER + "\n" + line(3))
        self.wait_for(4)

    def test_rotation_by_copy_and_cut(self):
        self.append(HEADER + "\n" + line(0) + line(1))
        self.wait_for(2)
        shutil.copy(self.export, self.export.with_name("export.1.csv"))
        os.truncate(self.export, 0)
        self.append(HEADER + "\n" + line(2))
        self.wait_for(3)

    def test_a_truncated_file_that_grows_again(self):
        self.append(HEADER + "\n" + line(0) + line(1) + line(2))
        self.wait_for(3)
        os.truncate(self.export, len(HEADER) + 1 + len(line(0)) + 7)
        self.settle()
        self.append(line(1)[7:] + line(2) + line(3))
        wait_until(lambda: self.readings()["accepted"] == 4, "the new row is taken in")
        self.assertEqual(self.values(), [10.6, 10.601, 10.602, 10.603])
        self.assertEqual(self.readings()["rejected"], 0)

    def test_rewritten_from_the_start_with_more_rows(self):
        self.append(HEADER + "\n" + line(0) + line(1))
        self.wait_for(2)
        for count, replace in ((3, False), (4, True)):  # in place, and by renaming another over it
            text = HEADER + "\n" + "".join(line(i) for i in range(count))
            if replace:
                other = self.site.folder / "new"
                other.write_text(text)
                os.rename(other, self.export)
            else:
                self.export.write_text(text)
            self.wait_for(count)

    def test_rewritten_with_other_columns(self):
        self.append(HEADER + "\n" + line(0) + line(1))
        self.wait_for(2)
        rows = [",".join(reversed(line(i).strip().split(","))) for i in range(3)]
        self.export.write_text("\n".join([",".join(reversed(HEADER.split(",")))] + rows) + "\n")
        self.wait_for(3, repeated=2)
        self.assertEqual(self.values(), [10.6, 10.601, 10.602])

    def test_a_header_repeated_and_one_changed_within_the_file(self):
        self.append(HEADER + "\n" + line(0) + HEADER + "\n" + line(1))
        self.wait_for(2)
        self.append(",".join(reversed(HEADER.split(","))) + "\n" + ",".join(reversed(line(2).strip().split(","))) + "\n")
        self.wait_for(3)
        self.restart(lambda: self.append(",".join(reversed(line(3).strip().split(","))) + "\n"))
        self.wait_for(4)
        self.assertEqual(self.values(), [10.6, 10.601, 10.602, 10.603])

    def test_a_void_and_its_correction_survive_rotation_and_restart(self):
        self.append(HEADER + "\n" + line(0) + line(0, "").replace("check", "void") + line(0, 10.7))
        self.wait_for(2, voided=1)
        self.restart(lambda: os.rename(self.export, self.export.with_name("old.csv")))
        self.append(HEADER + "\n" + line(1))
        self.wait_for(3, voided=1)
        self.assertEqual(self.values(), [10.7, 10.601])

    def test_bad_rows_are_told_once_and_good_ones_count(self):
        self.append(HEADER + "\n" + line(0) + line(1, "1,5"))
        self.wait_for(1, rejected=1)
        self.append(line(2) + "\x00\x01\xff\n")
        self.wait_for(2, rejected=2)
        self.restart()
        self.settle()
        self.assertEqual(self.readings(), {**ALL_KNOWN, "accepted": 2, "rejected": 2})
        alerts = self.site.get("/api/alerts?state=open")["alerts"]
        self.assertEqual([a["kind"] for a in alerts], ["file_rejected"])

    def test_an_export_that_cannot_be_read_is_told_stays_and_is_read_when_it_is_right(self):
        self.append("no header at all\n")
        wait_until(lambda: self.site.get("/api/status")["intake"]["files"]["rejected"] == 1, "it is told")
        self.append("nor here\n")
        self.settle()
        self.assertEqual(self.site.get("/api/status")["intake"]["files"]["rejected"], 1)
        self.export.write_text(HEADER + "\n" + line(0))
        wait_until(lambda: self.readings()["accepted"] == 1, "it is read once it is right")
        self.assertTrue(self.export.exists())

    def test_a_kill_in_the_middle_of_a_large_backlog(self):
        rows = 30_000
        self.site.kill()
        text = [f"check,{rfc3339(START + i)},protein,wheat-low,10.6\n" for i in range(rows)]
        self.append(HEADER + "\n" + "".join(text))
        self.site.start(wait_ready=False)
        for _ in range(4):
            wait_until(lambda: self.readings()["accepted"] > 0, "some rows are committed")
            self.restart()
        self.wait_for(rows)


MILL_EXPORT = """\
formats:
  mill_export:
    delimiter: ";"
    decimal: ","
    encoding: utf-16le
    mode: growing
    files: "*.csv"
    time: {column: Datum, pattern: "%d.%m.%Y %H:%M:%S"}
    item: {column: Probe}
    kind: {check_when_item_matches: "^CS-", otherwise: split}
    items: {"CS-LOW": wheat-low}
    values: {protein: "Prot %"}
"""


class GrowingMapped(SiteTest):
    """The analyzer's own export, in a character set of two bytes."""

    def test_it_is_read_on_through_rotation_half_characters_and_another_order_of_columns(self):
        config = CONFIG.format(port=0, rescan="1s", decimals=2, routes="    []")
        site = self.make_site(config=config.replace("line1: {inbox", "line1: {format: mill_export, inbox") + MILL_EXPORT).start()
        export = site.inbox("line1") / "export.csv"
        rows = [f"CS-LOW;0{i + 1}.02.2026 06:00:00;10,6{i}\r\n" for i in range(6)]
        header = "Probe;Datum;Prot %\r\n"

        def append(text, path=export, cut=0):
            data = text.encode("utf-16le")
            with open(path, "ab") as file:
                file.write(data[:len(data) - cut])
            return data[len(data) - cut:]

        def wait_for(count):
            wait_until(lambda: site.get("/api/status")["intake"]["readings"]["accepted"] == count, f"{count} readings are taken in")
            self.assertEqual(site.get("/api/status")["intake"]["readings"]["rejected"], 0)
        append(header + rows[0])
        wait_for(1)
        rest = append(rows[1], cut=1)  # between the two bytes of the line end
        with open(export, "ab") as file:
            file.write(rest)
        wait_for(2)
        old = export.with_name("export.old")  # a name that is not read
        os.rename(export, old)
        append(rows[2], old)
        append(header + rows[3])
        wait_for(4)
        turned = lambda row: ";".join(reversed(row.strip().split(";"))) + "\r\n"
        append(turned(header) + turned(rows[4]))
        wait_for(5)
        site.kill()
        append(turned(rows[5]))
        site.start()
        wait_for(6)
        values = [p["value"] for p in site.get("/api/charts/line1/wheat-low/protein?points=500")["points"]]
        self.assertEqual(values, [10.60, 10.61, 10.62, 10.63, 10.64, 10.65])
        self.assertEqual(site.get("/api/status")["intake"]["readings"]["repeated"], 0)


if __name__ == "__main__":
    import unittest
    unittest.main()
