"""Running the built command, for the checks of this folder."""

import argparse
import json
import pathlib
import subprocess

HERE = pathlib.Path(__file__).resolve().parent
ROOT = HERE.parent.parent
TIMEOUT = 600  # seconds for one call: a hang is a failure, not a wait


class CommandFailed(Exception):
    """The command ended in a way that the check did not expect."""

    def __init__(self, arguments, done):
        self.code = done.returncode
        text = (done.stdout[-600:] + done.stderr[-1500:]).strip()
        super().__init__(f"{' '.join(map(str, arguments))}: exit {done.returncode}\n{text}")


def options(description, *more):
    """The command line that the checks share: where the command is, and what `more` adds."""
    parser = argparse.ArgumentParser(description=description)
    parser.add_argument("--command", default=str(ROOT / "target/release/tallymark"), help="the built command")
    for name, settings in more:
        parser.add_argument(name, **settings)
    return parser.parse_args()


def run(command, *arguments):
    """Runs the command; gives its standard output. Any exit code but 0 raises."""
    done = subprocess.run([command, *map(str, arguments)], capture_output=True, text=True, timeout=TIMEOUT)
    if done.returncode != 0:
        raise CommandFailed([pathlib.Path(command).name, *arguments], done)
    return done.stdout


def run_json(command, *arguments):
    """Runs the command with `--json`; gives the object."""
    return json.loads(run(command, *arguments, "--json"))
