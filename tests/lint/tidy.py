#!/usr/bin/env python3
"""clang-tidy over the service's own sources, with the checks of .clang-tidy.

A file found clean is not looked at again until what the compiler sees of it changes: the key is its preprocessed
text (with its comments, which may hold a NOLINT), its compile command, .clang-tidy and the version of clang-tidy.
Every source is in one of the two counts printed at the end.
"""
import concurrent.futures
import hashlib
import json
import os
import pathlib
import shlex
import subprocess
import sys

ROOT = pathlib.Path(__file__).resolve().parents[2]
# Configured here and not built: the compile commands of single sources, whatever the build takes together.
BUILD = ROOT / "build-tidy"
CLEAN = BUILD / "tidy-clean"
# -Wno-restrict of the build is known to GCC alone. The analyzer follows at most 20,000 states through a function (of
# 225,000): a third of the time.
COMPILER_WORDS = ["-Wno-unknown-warning-option", "-Xclang", "-analyzer-config", "-Xclang", "max-nodes=20000"]
TIDY = ["clang-tidy", "-p", str(BUILD), "--quiet", *(f"--extra-arg={word}" for word in COMPILER_WORDS)]


def output_of(*command):
    return subprocess.run(command, cwd=ROOT, check=True, stdout=subprocess.PIPE).stdout


def preprocessed(compile_command):
    words = [word for word in shlex.split(compile_command) if not word.endswith("ccache")]
    if "-o" in words:
        at = words.index("-o")
        del words[at:at + 2]
    return output_of(*(word for word in words if word != "-c"), "-E", "-C")


def check(source, compile_command, common):
    key = hashlib.sha256(common + compile_command.encode() + preprocessed(compile_command)).hexdigest()
    if (CLEAN / key).exists():
        return "known"
    run = subprocess.run(TIDY + [source], cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
    if run.returncode == 0:
        (CLEAN / key).touch()
        return "clean"
    print(run.stdout or f"{source}: clang-tidy failed:\n{run.stderr}", flush=True)
    return "found"


def main():
    CLEAN.mkdir(parents=True, exist_ok=True)
    output_of("cmake", "-S", ".", "-B", str(BUILD), "-G", "Ninja", "-DCMAKE_BUILD_TYPE=Release", "-DAGREED_TESTS=OFF")
    listed = json.loads((BUILD / "compile_commands.json").read_text())
    commands = {os.path.relpath(entry["file"], ROOT): entry["command"] for entry in listed}
    sources = output_of("git", "ls-files", "--cached", "--others", "--exclude-standard",
                        "core/*.cpp", "config/*.cpp", "daemon/*.cpp").decode().split()
    common = (ROOT / ".clang-tidy").read_bytes() + output_of("clang-tidy", "--version") + repr(TIDY).encode()
    missing = [source for source in sources if source not in commands]
    for source in missing:
        print(f"{source} is compiled into nothing")
    with concurrent.futures.ThreadPoolExecutor(2) as pool:
        results = list(pool.map(lambda s: check(s, commands[s], common), [s for s in sources if s not in missing]))
    print(f"clang-tidy: {results.count('clean')} looked at and clean, {results.count('known')} unchanged since found "
          f"clean, {results.count('found')} with findings")
    return 1 if missing or "found" in results else 0


if __name__ == "__main__":
    sys.exit(main())
