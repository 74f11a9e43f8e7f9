"""Is every problem decided? Compiles each at one level, audits the circuit with default options, and prints a table.

The problems are the demos, and those of the folder of instances that TALLYMARK_INSTANCES or `--instances` names, where
its `index.json` expects "ok". Seconds are CPU seconds of the command, and both steps are cut after `--cut` of them.
"""

import json
import os
import pathlib
import resource
import subprocess
import sys
import tempfile
import time

from command import ROOT, options

FEWEST_DEMOS = 9  # fewer means that the check looks in the wrong place
WALL = 8  # a step may take so many times the cut by the clock: the machine may be shared
NOTHING_TO_MARK = {"C001", "C002", "C003"}  # no bits, no solution or every string a solution: an answer, no circuit


def timed(cut, *command):
    """Runs a command for at most so many CPU seconds: (exit code or None where it was cut, its output, CPU seconds)."""
    # The command's own process has the limit, so a thread that is left behind counts too.
    limit = lambda: resource.setrlimit(resource.RLIMIT_CPU, (cut, cut + 1))  # noqa: E731
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    start = time.monotonic()
    try:
        done = subprocess.run(
            list(map(str, command)), capture_output=True, text=True, timeout=WALL * cut, preexec_fn=limit
        )
        code, output = done.returncode, done.stdout
    except subprocess.TimeoutExpired:
        code, output = None, ""
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    seconds = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    if code is not None and code < 0:
        code = None
    return code, output, seconds if time.monotonic() - start < WALL * cut else float("inf")


def decide(command, path, level, cut, folder):
    """One problem: (verdict, how, seconds of both steps)."""
    circuit = folder / "oracle.qasm"
    code, output, making = timed(cut, command, "compile", path, "--level", level, "-o", circuit, "--json")
    if code != 0:
        error = json.loads(output).get("error", {}) if output else {}
        if error.get("code") in NOTHING_TO_MARK:
            return "nothing to mark", error["code"], making
        return "not compiled", "cut" if code is None else str(error.get("code")), making
    code, output, judging = timed(cut, command, "audit", path, circuit, "--json")
    if code is None or not output:
        return "undecided", "cut", making + judging
    audit = json.loads(output).get("audit", {})
    return audit.get("verdict", "failed"), str(audit.get("how")), making + judging


def instances(folder):
    """The files of a folder with an index that must be accepted."""
    if not folder:
        return []
    folder = pathlib.Path(folder)
    index = json.loads((folder / "index.json").read_text())
    return [folder / entry["file"] for entry in index if entry["expect"] == "ok"]


def main():
    given = options(
        __doc__.splitlines()[0],
        ("--instances", {"default": os.environ.get("TALLYMARK_INSTANCES"), "help": "a folder with an index.json"}),
        ("--level", {"default": "toffoli", "help": "the level of the circuits"}),
        ("--cut", {"type": int, "default": 60, "help": "CPU seconds after which a step is cut"}),
        ("--only", {"default": "", "help": "only files whose names hold this"}),
        ("files", {"nargs": "*", "type": pathlib.Path, "help": "these problems instead"}),
    )
    demos = sorted(path for path in (ROOT / "problems").glob("*.*") if path.suffix != ".json")
    if len(demos) < FEWEST_DEMOS:
        print(f"only {len(demos)} demos were found: is this the right tree?")
        return 1
    if not given.files and not given.instances:
        print("no folder of instances was named, so the demos alone are decided")
    undecided, count, slowest = [], 0, 0.0
    for path in given.files or [*demos, *instances(given.instances)]:
        if given.only not in path.name:
            continue
        with tempfile.TemporaryDirectory() as folder:
            verdict, how, seconds = decide(given.command, path, given.level, given.cut, pathlib.Path(folder))
        print(f"{path.name:36} {verdict:16} {how:12} {seconds:8.2f} s", flush=True)
        count += 1
        slowest = max(slowest, seconds)
        if verdict not in ("equal", "nothing to mark") or seconds > given.cut:
            undecided.append(path.name)
    print(f"decided: {count - len(undecided)} of {count} at level {given.level}, the slowest in {slowest:.1f} s")
    for name in undecided:
        print(f"not decided within {given.cut} s: {name}")
    return 1 if undecided else 0


if __name__ == "__main__":
    sys.exit(main())
