"""How long `tallymark count` takes beside three ways that others would take, on the same files in the same run.

    bench_counting.py TALLYMARK [--instances FOLDER] [--limit SECONDS] [--only WORD]... [--seeds N] [--known FILE]

The ways: an exact counter (pyganak), an approximate one (pyapproxmc, at its usual tolerance 0.8 and confidence 0.8), and
blocking-clause enumeration (cadical by python-sat). Needs those three packages beside Python 3.11. Measured is CPU time:
of the solver's call for the others; for tallymark of the whole command less that of counting an empty formula, so that
its reading counts but its start does not (with --unconfirmed, since the others do not confirm either). A ratio is (ours + 10 ms) / (best of the three + 10 ms); a
time-out counts as the limit, files on which nobody finishes are left out. --known keeps the others' figures in a file
and takes them from there, for work on tallymark alone.

Every count is compared with the index of the instances and with the exact counter: a difference ends with exit code 1.
"""

import argparse
import json
import math
import os
import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import pyapproxmc
import pyganak
from pysat.solvers import Cadical153

from counting_families import all_families

OFFSET = 0.010
WAYS = ("exact", "approximate", "enumeration")


def read(path):
    """Variables, clauses and shown variables of a well-formed file."""
    variables, clauses, shown, clause = 0, [], None, []
    for line in Path(path).read_text(errors="replace").splitlines():
        words = line.split()
        if words[:3] == ["c", "p", "show"]:
            shown = (shown or []) + [int(word) for word in words[3:] if int(word)]
        elif words[:2] == ["p", "cnf"]:
            variables = int(words[2])
        elif words[:1] == ["%"]:
            break
        elif words and words[0] != "c":
            for word in words:
                if int(word):
                    clause.append(int(word))
                else:
                    clauses.append(clause)
                    clause = []
    return variables, clauses, shown


def tidy(clauses):
    """Without tautologies and repeated literals, which some of the ways do not take; None where a clause is empty."""
    kept = []
    for clause in clauses:
        literals = sorted(set(clause), key=abs)
        if not literals:
            return None
        if not any(-literal in clause for literal in literals):
            kept.append(literals)
    return kept


def count_by(way, formula, seed):
    """The count by one of the ways."""
    variables, clauses, shown = formula
    if clauses is None:
        return 0
    if way == "exact":
        return by_exact_counter(variables, clauses, shown, seed)
    if way == "approximate":
        return by_hashing(variables, clauses, shown, seed)
    return by_enumeration(variables, clauses, shown)


def measured(way, formula, seed, limit):
    """The count and its CPU seconds, in a process of its own that may use so many; None if it did not finish."""
    reader, writer = os.pipe()
    child = os.fork()
    if child == 0:
        try:
            used = sum(resource.getrusage(resource.RUSAGE_SELF)[:2])
            bound = math.ceil(used + limit) + 1
            resource.setrlimit(resource.RLIMIT_CPU, (bound, bound))
            start = time.process_time()
            count = count_by(way, formula, seed)
            seconds = time.process_time() - start
            os.write(writer, json.dumps([str(count), seconds]).encode())
        finally:
            # Whatever went wrong: this process must not go on as its parent would.
            os._exit(0)
    os.close(writer)
    with os.fdopen(reader, "rb") as result:
        text = result.read()
    os.waitpid(child, 0)
    count, seconds = json.loads(text) if text else (None, limit)
    return (count, seconds) if text and seconds <= limit else None


def by_exact_counter(variables, clauses, shown, seed):
    counter = pyganak.Counter(seed=seed)
    counter.new_vars(variables)
    if shown is not None:
        counter.set_sampling_set(shown)
    counter.add_clauses(clauses)
    return counter.count()


def by_hashing(variables, clauses, shown, seed):
    counter = pyapproxmc.Counter(seed=seed, epsilon=0.8, delta=0.2)
    counter.add_clauses(clauses)
    support = list(range(1, variables + 1)) if shown is None else shown
    cells, hashes = counter.count(support)
    return cells << hashes


def by_enumeration(variables, clauses, shown):
    support = list(range(1, variables + 1)) if shown is None else shown
    count = 0
    with Cadical153(bootstrap_with=clauses) as solver:
        while solver.solve():
            count += 1
            model = set(solver.get_model())
            block = [-var if var in model else var for var in support]
            if not block:
                break
            solver.add_clause(block)
    return count


def run(command, limit):
    """Output and CPU seconds of a command that may use so many; output None if it did not finish well."""
    def bound():
        seconds = math.ceil(limit) + 1
        resource.setrlimit(resource.RLIMIT_CPU, (seconds, seconds + 1))

    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    done = subprocess.run(command, capture_output=True, text=True, preexec_fn=bound, check=False)
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    seconds = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    return done.stdout if done.returncode == 0 else None, seconds


def others(path, limit, seeds):
    """The best of the three, and what each took (the median of the seeds). None needs longer than the best so far."""
    variables, clauses, shown = read(path)
    formula = variables, tidy(clauses), shown
    figures, best = {}, limit
    for way in WAYS:
        times = []
        for seed in range(1, (1 if way == "enumeration" else seeds) + 1):
            answer = measured(way, formula, seed, min(limit, best + 0.5))
            if answer is None:
                times = None
                break
            figures[way + " count"], seconds = answer
            times.append(seconds)
        if times:
            figures[way] = sorted(times)[len(times) // 2]
            best = min(best, figures[way])
    figures["best"] = best
    return figures


def ours(tallymark, path, limit, options, start=0.0):
    """The tally (None if it did not finish) and its CPU seconds without those of the start."""
    command = [tallymark, "count", str(path), "--json", "--threads", "1", "--unconfirmed", *options]
    out, seconds = run(command, limit)
    if out is None:
        return None, limit
    return json.loads(out)["tally"], min(max(seconds - start, 0.0), limit)


def start_of(tallymark, scratch):
    """The CPU seconds of counting an empty formula: the least of several."""
    empty = scratch / "empty.cnf"
    empty.write_text("p cnf 0 0\n")
    return min(ours(tallymark, empty, 10.0, [])[1] for _ in range(9))


def files(folder, scratch):
    """Family, name, path, and the listed count or None."""
    if folder is not None:
        for entry in json.loads((folder / "index.json").read_text()):
            if entry["expect"] != "ok" or entry.get("count") is None:
                continue
            variables, clauses, shown = read(folder / entry["file"])
            plain = scratch / f"plain-{entry['file']}"
            rows = [" ".join(map(str, clause + [0])) for clause in clauses]
            plain.write_text("\n".join([f"p cnf {variables} {len(rows)}", *rows]) + "\n")
            yield "instances", entry["file"], plain, entry["count"]
            if entry.get("projected_count") is not None and shown is not None:
                yield "instances shown", entry["file"] + " shown", folder / entry["file"], entry["projected_count"]
    for family, name, make in all_families():
        path = scratch / f"{name}.cnf"
        path.write_text(make().text())
        yield family, name, path, None


def main():
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("tallymark")
    parser.add_argument("--instances", type=Path)
    parser.add_argument("--limit", type=float, default=20.0)
    parser.add_argument("--only", action="append", default=[])
    parser.add_argument("--seeds", type=int, default=1)
    parser.add_argument("--known", type=Path)
    parser.add_argument("--option", action="append", default=[], help="a further option for tallymark, as --option=--x")
    arguments = parser.parse_args()
    known = json.loads(arguments.known.read_text()) if arguments.known and arguments.known.exists() else {}
    ratios, wrong = {}, 0
    print(f"{'file':<36}{'ours':>9}{'best':>9}{'ratio':>8}   exact / approximate / enumeration")
    with tempfile.TemporaryDirectory() as scratch:
        start = start_of(arguments.tallymark, Path(scratch))
        print(f"(the start of the command takes {start:.3f} s)")
        for family, name, path, count in files(arguments.instances, Path(scratch)):
            if arguments.only and not any(word in f"{family} {name}" for word in arguments.only):
                continue
            key = f"{name} {arguments.limit} {arguments.seeds}"
            if key not in known:
                known[key] = others(path, arguments.limit, arguments.seeds)
                if arguments.known:
                    arguments.known.write_text(json.dumps(known))
            figures = known[key]
            tally, seconds = ours(arguments.tallymark, path, arguments.limit, arguments.option, start)
            found = tally["count"] if tally else None
            listed = count or figures.get("exact count") or figures.get("enumeration count")
            note = f"  {tally['method']}" if tally else "  time-out"
            if found is not None and listed is not None and found != listed:
                wrong += 1
                note += f"  WRONG: {found}, not {listed}"
            if found is not None or any(way in figures for way in WAYS):
                ratio = (seconds + OFFSET) / (figures["best"] + OFFSET)
                ratios.setdefault(family, []).append((ratio, name))
                shown = " / ".join(f"{figures[way]:.3f}" if way in figures else "-" for way in ("exact", "approximate", "enumeration"))
                print(f"{name:<36}{seconds:>9.3f}{figures['best']:>9.3f}{ratio:>8.2f}   {shown}{note}", flush=True)
            else:
                print(f"{name:<36} nobody finishes in {arguments.limit} s", flush=True)
    summary(ratios)
    return 1 if wrong else 0


def summary(ratios):
    mean = lambda pairs: math.exp(sum(math.log(ratio) for ratio, _ in pairs) / len(pairs))
    print()
    for family, pairs in ratios.items():
        worst = max(pairs)
        print(f"{family:<20}{len(pairs):>4} files   mean {mean(pairs):.3f}   worst {worst[0]:.2f} ({worst[1]})")
    everything = [pair for pairs in ratios.values() for pair in pairs]
    if everything:
        worst = max(everything)
        print(f"{'all':<20}{len(everything):>4} files   mean {mean(everything):.3f}   worst {worst[0]:.2f} ({worst[1]})")
        print("goals: mean <= 0.5, <= 1 in each family, no file above 5")


if __name__ == "__main__":
    sys.exit(main())
