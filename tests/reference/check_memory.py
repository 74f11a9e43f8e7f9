"""The peak memory of `tallymark count --memory` on hard formulas: below the limit, and the same count as without it.

    check_memory.py TALLYMARK [LIMIT IN MIB]

The search is forced (--by components), on random formulas whose cache would grow far beyond the limit.
"""

import json
import os
import subprocess
import sys
import tempfile
from pathlib import Path

from counting_families import random_3sat

FORMULAS = ((66, 2, 1), (95, 3, 1))


def counted(tallymark, path, *options):
    """The tally and the peak memory in MiB."""
    command = [tallymark, "count", str(path), "--json", "--by", "components", "--unconfirmed", "--threads", "1", *options]
    reader, writer = os.pipe()
    child = subprocess.Popen(command, stdout=writer)
    os.close(writer)
    with os.fdopen(reader) as output:
        text = output.read()
    _, status, usage = os.wait4(child.pid, 0)
    child.returncode = os.waitstatus_to_exitcode(status)
    return json.loads(text)["tally"], usage.ru_maxrss / 1024


def main():
    tallymark, limit = sys.argv[1], int(sys.argv[2]) if len(sys.argv) > 2 else 100
    failed = 0
    with tempfile.TemporaryDirectory() as scratch:
        for formula in FORMULAS:
            path = Path(scratch) / "formula.cnf"
            path.write_text(random_3sat(*formula).text())
            free, most = counted(tallymark, path)
            bound, peak = counted(tallymark, path, "--memory", f"{limit}M")
            right = free["exact"] and bound["count"] == free["count"]
            below = peak < limit
            failed += not (right and below)
            print(f"random {formula}: {most:.0f} MiB without a limit, {peak:.0f} of {limit} MiB, count {bound['count']}"
                  f"{'' if right else ' WRONG'}{'' if below else ' TOO MUCH'}")
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main())
