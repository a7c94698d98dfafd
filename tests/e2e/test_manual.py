"""The manual pages are free of faults, and completion knows every command, option and argument, in a real bash."""
import os
import pathlib
import re
import shutil
import subprocess
import tempfile
import unittest

import harness

AGREED = os.path.abspath(harness.AGREED)  # found from any folder

ROOT = pathlib.Path(__file__).resolve().parents[2]
PAGES = [pathlib.Path(AGREED).parent / "man" / name for name in ("agreed.1", "agreed.yaml.5")]
COMPLETION = ROOT / "deploy" / "completion" / "agreed"


def help_of(*command):
    return subprocess.run([AGREED, *command, "--help"], capture_output=True, text=True, check=True).stdout


def commands():
    return re.findall(r"^  ([a-z-]+) ", help_of().split("Subcommands:")[1].split("\n\n")[0], re.M)


def options(*command):
    return re.findall(r"^  (?:-h,)?(--[a-z-]+)", help_of(*command), re.M)


class Pages(unittest.TestCase):
    def test_man_and_mandoc_find_no_fault_in_them(self):
        for page in PAGES:
            shown = subprocess.run(["man", "--warnings", "-l", str(page)], capture_output=True, text=True,
                                   env={**os.environ, "MANWIDTH": "100", "LC_ALL": "C.UTF-8"}, check=True)
            self.assertEqual(shown.stderr, "")
            self.assertGreater(len(shown.stdout), 5_000)
            checked = subprocess.run(["mandoc", "-Tlint", str(page)], capture_output=True, text=True)
            self.assertEqual((checked.returncode, checked.stdout, checked.stderr), (0, "", ""))

    def test_what_man_shows_holds_every_example_of_the_help_as_one_types_it(self):
        shown = subprocess.run(["man", "-l", str(PAGES[0])], capture_output=True, text=True, check=True,
                               env={**os.environ, "MANWIDTH": "200", "LC_ALL": "C.UTF-8"}).stdout
        for command in commands():
            examples = re.findall(r"^  (agreed .*)", help_of(command), re.M)
            self.assertTrue(examples, command)
            for example in examples:
                self.assertIn(example, shown)


class Completion(unittest.TestCase):
    def setUp(self):
        self.folder = pathlib.Path(tempfile.mkdtemp(prefix="agreed-e2e-"))
        self.addCleanup(shutil.rmtree, self.folder)
        subprocess.run([AGREED, "example", self.folder / "mill"], check=True, capture_output=True)
        text = (self.folder / "mill" / "agreed.yaml").read_text()
        (self.folder / "agreed.yaml").write_text(text + "alerts:\n  routes:\n    - {name: shift, url: 'http://127.0.0.1:9/'}\n"
                                                 "    - name: engineer\n      url: http://127.0.0.1:9/\n")
        (self.folder / "two words.yaml").write_text(text)
        (self.folder / "export.csv").write_text("")

    def complete(self, *words):
        """What bash offers for the last of the words; it is asked as readline asks."""
        script = ('. "$0"; entry=$(complete -p agreed); [[ $entry == *"-F _agreed "* ]] || exit 9\n'
                  'COMP_WORDS=("$@"); COMP_CWORD=$(($# - 1)); _agreed agreed "${COMP_WORDS[COMP_CWORD]}"\n'
                  'for one in "${COMPREPLY[@]}"; do printf "%s\\n" "$one"; done')
        ran = subprocess.run(["bash", "--norc", "-c", script, str(COMPLETION), "agreed", *words], cwd=self.folder,
                             capture_output=True, text=True,
                             env={**os.environ, "PATH": f"{pathlib.Path(AGREED).parent}:{os.environ['PATH']}"})
        self.assertEqual((ran.returncode, ran.stderr), (0, ""))
        return ran.stdout.splitlines()

    def test_every_command_and_each_of_its_options_is_offered_and_none_besides(self):
        self.assertEqual(self.complete(""), commands())
        self.assertEqual(sorted(self.complete("--")), sorted(options()))
        for command in commands():
            self.assertIn(command, self.complete(command[:2]))
            self.assertEqual(sorted(self.complete(command, "--")), sorted(options(command)), command)

    def test_arguments_are_offered_by_what_they_are(self):
        for command in commands():
            usage = re.search(r"Usage: agreed \S+ \[OPTIONS\] (\S+)", help_of(command))[1]
            offered = set(self.complete(command, ""))
            if usage == "DIR":
                self.assertEqual(offered, {"mill"}, command)
            else:
                self.assertEqual(offered, {"agreed.yaml", "two words.yaml", "mill"}, command)
        self.assertIn("export.csv", self.complete("backup", "agreed.yaml", ""))
        self.assertEqual(self.complete("check", "agr"), ["agreed.yaml"])

    def test_values_of_options_and_names_of_the_configuration_are_offered(self):
        self.assertEqual(self.complete("token", "agreed.yaml", "--role", ""), ["reader", "operator"])
        self.assertEqual(self.complete("token", "--role", "operator", ""), self.complete("check", ""))
        self.assertEqual(self.complete("send-test", "agreed.yaml", ""), ["shift", "engineer"])
        self.assertEqual(self.complete("send-test", "agreed.yaml", "--json", "s"), ["shift"])
        self.assertEqual(self.complete("check", "agreed.yaml", "--sample", "exp"), ["export.csv"])
        self.assertEqual(self.complete("check", "agreed.yaml", "--sample", "export.csv", "--analyzer", ""), ["line1", "line2"])
        self.assertEqual(self.complete("send-test", "nowhere.yaml", ""), [])
        self.assertEqual(self.complete("no-such-command", ""), [])


if __name__ == "__main__":
    unittest.main()
