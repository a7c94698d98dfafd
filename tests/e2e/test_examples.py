"""Every example that is printed is run: those of each --help, and the shell blocks of README and deploy/*.md.

They are taken from where they stand, so a new command or chapter is tested by being written. The places they name are given to
a site made for them: /etc/agreed and the folder one is in are its folder, /srv/agreed and /mnt/lab its inboxes, /backup a folder there, 127.0.0.1:7480 where its
service answers. `agreed run` is ended once it is ready, as Ctrl-C would."""
import json
import os
import pathlib
import re
import shutil
import subprocess
import sys
import tempfile
import unittest

import harness
from harness import SiteTest, free_port, wait_until
from plant import Plant, csv

AGREED = os.path.abspath(harness.AGREED)
ROOT = pathlib.Path(__file__).resolve().parents[2]
DOCUMENTS = [ROOT / "README.md", *sorted((ROOT / "deploy").glob("*.md"))]

# What is not run here, and why.
NOT_RUN = {
    r"^sh (examples/demo|tests/run)\.sh": "tests of their own: the demo, and this suite",
    r"^sh deploy/(setup|build)\.sh": "installs packages and builds: what CI begins with",
    r"^(sudo )?apt\b": "installs: tests/package/run.sh does it in a Debian of its own",
    r"^install -d -o |^chown -R agreed:": "needs the package's user: tests/package/run.sh",
    r"^(sudo )?(systemctl|journalctl)\b": "needs systemd: tests/package/run.sh",
    r"^(adduser|smbpasswd|testparm)\b": "sets up the machine's file server",
    r"^sudo .*nginx\b|^sudoedit /etc/nginx/": "changes the machine's web server: test_proxy runs the same file",
}
# Where exit status 1 is an answer ("not everything agrees", "the period holds nothing") and not a failure.
MAY_SAY_NO = {"status", "report", "replay", "plan"}

AGREED_OF_THE_TESTS = """#!%(python)s
# agreed as the examples are run: a service ends when it is ready, and a written example listens on a free port.
import pathlib, re, signal, subprocess, sys, time, urllib.request
real, arguments = "%(agreed)s", sys.argv[1:]
if arguments[:1] != ["run"] or "--help" in arguments:
    code = subprocess.call([real, *arguments])
    if code == 0 and arguments[:1] == ["example"]:
        written = pathlib.Path(arguments[1]) / "agreed.yaml"
        text = written.read_text()
        assert "port: 7480" in text
        written.write_text(text.replace("port: 7480", "port: 0"))
    sys.exit(code)
service = subprocess.Popen([real, *arguments], stdout=subprocess.PIPE, text=True)
said = re.search(r"http://\\S+", service.stdout.readline())
end = time.monotonic() + %(deadline)f
while said and service.poll() is None and time.monotonic() < end:
    try:
        urllib.request.urlopen(said[0].rstrip("/") + "/health/ready", timeout=5)
        break
    except OSError:
        time.sleep(0.02)
else:
    sys.exit("the service was not ready in time")
service.send_signal(signal.SIGTERM)
sys.exit(service.wait(20))
"""


def help_text(*command):
    return subprocess.run([AGREED, *command, "--help"], capture_output=True, text=True, check=True).stdout


def commands():
    return re.findall(r"^  ([a-z-]+) ", help_text().split("Subcommands:")[1].split("\n\n")[0], re.M)


def examples_of(help_):
    """The indented lines below "Example:"."""
    return re.findall(r"^  (\S.*)$", help_.split("Example", 1)[1], re.M) if "Example" in help_ else []


def shell_lines(markdown):
    """The commands of its ```sh blocks, without comments, lines that go on joined."""
    for block in re.findall(r"^```sh\n(.*?)^```", markdown, re.M | re.S):
        for line in block.replace("\\\n", " ").splitlines():
            command = re.sub(r"(^|\s)# .*$|^#.*$", "", line).strip()
            if command:
                yield command


def reason_not_to_run(command):
    return next((pattern for pattern in NOT_RUN if re.search(pattern, command)), None)


class Examples(SiteTest):
    def setUp(self):
        self.receiver = self.make_receiver()
        self.site = self.make_site(receiver_port=self.receiver.port)
        folder = self.site.folder
        text = self.site.config.read_text().replace("port: 0", f"port: {free_port()}")
        self.site.config.write_text(text + "access: {tokens_file: secrets/tokens}\n")
        for name in ("bin", "secrets", "backup", "home"):
            (folder / name).mkdir()
        (folder / "build").symlink_to("bin")
        self.program("agreed", AGREED_OF_THE_TESTS % {"python": sys.executable, "agreed": AGREED, "deadline": harness.DEADLINE})
        self.program("curl", f'#!/bin/sh\nexec {shutil.which("curl")} -sS --fail-with-body "$@"\n')
        self.program("sudo", '#!/bin/sh\n[ "$1" != -u ] || shift 2\nexec "$@"\n')
        made = json.loads(self.real("token", self.site.config, "--role", "operator", "--name", "tests", "--json").stdout)
        self.token = made["token"]
        (folder / "home" / ".agreed-token").write_text(self.token + "\n")
        plant = Plant()
        checks, splits = plant.checks(0, 12), plant.splits(0, 48)
        (folder / "export.csv").write_text(csv(plant.splits(48, 3)["line2"]))
        self.site.start()
        for analyzer in ("line1", "line2"):
            self.site.drop(analyzer, "days.csv", csv(checks[analyzer] + splits[analyzer]))
        self.site.wait_taken()
        self.site.drop("line2", "bad.csv", "nonsense\n")
        self.message = wait_until(lambda: self.receiver.events("file_rejected"), "a message has arrived")[0]["id"]

    def program(self, name, text):
        file = self.site.folder / "bin" / name
        file.write_text(text)
        file.chmod(0o755)

    def real(self, *arguments):
        return subprocess.run([AGREED, *map(str, arguments)], capture_output=True, text=True, timeout=60, check=True)

    def given(self, command):
        """The command with this site's places in it."""
        command = command.replace("/etc/agreed/", f"{self.site.folder}/").replace("/backup/", f"{self.site.folder}/backup/")
        for folder in ("/srv/agreed/", "/mnt/lab/"):
            command = command.replace(folder, f"{self.site.folder}/drop/")
        if "/done/2026-01-05/" in command:
            command = command.replace("/done/2026-01-05/", f"/done/{self.day_with_files()}/")
        command = command.replace("http://127.0.0.1:7480", self.site.base)
        command = command.replace("msg_0123456789abcdef0123456789abcdef", self.message)
        if "812:3f0c..." in command:
            chain = self.site.get("/api/status")["chain"]
            command = command.replace("812:3f0c...", f"{chain['sequence']}:{chain['sha256']}")
        return command

    def day_with_files(self):
        done = self.site.inbox("line2") / "done"
        return wait_until(lambda: [file.parent.name for file in done.glob("*/*")], "a file is in done/")[0]

    def make_ready(self, command):
        """What the same example left the last time is out of the way, and what it reads is there."""
        if "agreed example" in command:
            shutil.rmtree(self.site.folder / "mill", ignore_errors=True)
        if "agreed token" in command:
            tokens = self.site.folder / "secrets" / "tokens"
            tokens.write_text("".join(line + "\n" for line in tokens.read_text().splitlines() if " tests " in line))
        if "agreed backup" in command:
            for old in (self.site.folder / "backup").glob("*.sqlite"):
                old.unlink()
        else:
            for file in map(pathlib.Path, re.findall(r"(\S+\.sqlite)", command)):
                if not file.exists():
                    self.real("backup", self.site.config, file)
        for page in re.findall(r"--out (\S+)\.html", command):
            for old in self.site.folder.glob(page + ".*"):
                old.unlink()
        if "agreed resend" in command:
            wait_until(lambda: all(d["state"] == "delivered" for a in self.site.get("/api/alerts")["alerts"]
                                   for d in self.site.get(f"/api/alerts/{a['id']}")["deliveries"]), "all is delivered")

    def run_example(self, example, where):
        command = self.given(example)
        self.make_ready(command)
        alone = re.search(r"agreed (restore|run) \S*agreed\.yaml|^mv ", command) and "mill" not in command
        if alone:
            self.assertEqual(self.site.stop()[0], 0)
        done = subprocess.run(["bash", "-ec", command], cwd=self.site.folder, capture_output=True, text=True, timeout=120,
                              env={**os.environ, "HOME": str(self.site.folder / "home"), "AGREED_TOKEN": self.token,
                                   "PATH": f"{self.site.folder}/bin:{os.environ['PATH']}"})
        name = re.search(r"agreed ([a-z-]+)", example)
        fine = (0, 1) if name and name[1] in MAY_SAY_NO else (0,)
        self.assertIn(done.returncode, fine, f"{where}: {example}\nrun as: {command}\n{done.stdout}{done.stderr}")
        if alone:
            self.site.start()

    def test_every_example_of_every_help_works(self):
        for command in [None, *commands()]:
            examples = examples_of(help_text(*([command] if command else [])))
            self.assertTrue(examples, f"agreed {command} --help has no example")
            for example in examples:
                with self.subTest(example=example):
                    self.assertRegex(example, r"^agreed " + (command or ""))
                    self.run_example(example, f"agreed {command or ''} --help")

    def test_every_shell_line_of_the_documents_works(self):
        ran, used = 0, set()
        for document in DOCUMENTS:
            for command in shell_lines(document.read_text()):
                pattern = reason_not_to_run(command)
                used.add(pattern)
                if pattern is None:
                    ran += 1
                    with self.subTest(document=document.name, command=command):
                        self.run_example(command, document.name)
        self.assertGreater(ran, 10)
        self.assertEqual(set(NOT_RUN) - used, set(), "these are in no document any more")


class Documents(unittest.TestCase):
    def test_every_alert_kind_has_its_chapter_and_there_is_none_besides(self):
        source = (ROOT / "core" / "base" / "finding.cpp").read_text()
        kinds = re.findall(r'"([a-z_]+)"', re.search(r"kKinds = \{(.*?)\}", source, re.S)[1])
        chapters = re.findall(r"^### (\w+)\n((?:(?!^#).*\n)+)", (ROOT / "deploy" / "alerts.md").read_text(), re.M)
        self.assertGreater(len(kinds), 10)
        self.assertEqual(sorted(name for name, _ in chapters), sorted(kinds))
        for name, text in chapters:
            self.assertIn("**Do:**", text, name)

    def test_every_document_that_is_linked_is_there(self):
        for document in DOCUMENTS:
            self.assert_links_lead_somewhere(document)

    def test_the_installed_documents_are_all_there_and_lead_to_each_other(self):
        where = pathlib.Path(tempfile.mkdtemp(prefix="agreed-e2e-"))
        self.addCleanup(shutil.rmtree, where)
        subprocess.run(["cmake", "--install", os.path.dirname(AGREED), "--prefix", "/usr"], check=True, capture_output=True,
                       env={**os.environ, "DESTDIR": str(where)})
        installed = where / "usr" / "share" / "doc" / "agreed"
        for document in DOCUMENTS:
            copy = installed / document.relative_to(ROOT)
            self.assertTrue(copy.exists(), f"{document.name} is not installed")
            self.assert_links_lead_somewhere(copy)
        unit = (where / "lib" / "systemd" / "system" / "agreed.service").read_text()
        named = re.findall(r"/usr/share/doc/agreed/[\w./-]*\w", unit + (where / "etc" / "agreed" / "agreed.yaml").read_text())
        self.assertGreater(len(named), 1)
        for file in named:
            self.assertTrue((where / file.lstrip("/")).exists(), file)

    def assert_links_lead_somewhere(self, document):
        for link in re.findall(r"\]\(([^)#:]+)\)", document.read_text()):
            self.assertTrue((document.parent / link).exists(), f"{document}: {link}")
