"""What the scripts that run the command share: where the binary is, a run with a time limit, results files that open."""
import os
import subprocess
import sys

import h5py

HERE = os.path.dirname(os.path.abspath(__file__))
TREE = os.path.dirname(os.path.dirname(HERE))
FLOWSHEETS = os.path.join(TREE, "flowsheets")


def binary():
    """The leat binary: the first argument if it names a file, else the environment variable LEAT."""
    given = sys.argv.pop(1) if len(sys.argv) > 1 and os.path.isfile(sys.argv[1]) else os.environ.get("LEAT", "")
    if not os.access(given, os.X_OK):
        sys.exit(f"usage: {os.path.basename(sys.argv[0])} LEAT_BINARY, or set LEAT; '{given}' cannot be run")
    return os.path.abspath(given)


class Done:
    """How a command ended: code (below 0: the signal that ended it), stdout, stderr."""

    def __init__(self, code, out, err):
        self.code, self.out, self.err = code, out, err


def run(command, folder, seconds=60, before=None):
    """Runs a command in a folder; raises subprocess.TimeoutExpired, with the command ended, when it takes longer."""
    done = subprocess.run(command, cwd=folder, capture_output=True, timeout=seconds, preexec_fn=before)
    return Done(done.returncode, done.stdout.decode("utf-8", "replace"), done.stderr.decode("utf-8", "replace"))


def files_under(folder):
    """Every file and folder below a folder, as paths relative to it."""
    found = []
    for root, folders, files in os.walk(folder):
        found += [os.path.relpath(os.path.join(root, name), folder) for name in folders + files]
    return sorted(found)


def open_whole(path):
    """Reads every item of a results file to its last value; raises when it is not whole. Returns the number of items."""
    with h5py.File(path, "r") as results:
        for data in results.values():
            data[()]
        assert "leat_format_version" in results.attrs, path
        return len(results)


def read_text(path):
    with open(path, encoding="utf-8") as file:
        return file.read()
