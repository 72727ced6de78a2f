"""A laboratory for system tests: a coordinator, workers and clients as real processes in a folder of their own."""

import json
import os
import pathlib
import shutil
import signal
import subprocess
import tempfile
import time
import unittest

BIN = pathlib.Path(os.environ["DROVER_BIN"])
SOURCE = pathlib.Path(os.environ["DROVER_SOURCE"])

# Short times, so that what takes minutes in a lab takes seconds here.
TIMES = """
[times]
renew_every = "300ms"
lease = "2s"
grace = "2s"
patience = "3s"
retry_first = "100ms"
retry_most = "1s"
longest_poll = "2s"
"""

CODE = """
[code]
name = "peaks"
version = "1"
command = ["{program}", "deck.txt", {arguments}]
time_limit = "{time_limit}"
grace = "1s"

[[accepts]]
name = "x"
unit = "m"

[[accepts]]
name = "y"
unit = "m"

[[input]]
template = "deck.txt.in"
writes = "deck.txt"

[[output]]
name = "height"
unit = "m"
file = "report.txt"
after = "HEIGHT ="

[[output]]
name = "distance"
unit = "m"
file = "report.txt"
after = "DISTANCE ="

[healthy]
absent = ["FATAL"]
"""

STUDY = """
[study]
name = "{name}"
code = "peaks"

[[variable]]
name = "x"
unit = "m"
low = -3
high = 3

[[variable]]
name = "y"
unit = "m"
low = -3
high = 3

[[objective]]
minimise = "height"

[search]
method = "{method}"
seed = {seed}
{search}

[budget]
runs = {runs}
"""


def eventually(holds, what, most=120.0):
    """Waits until `holds()` is true and returns it; a far limit and never a fixed sleep."""
    end = time.monotonic() + most
    while True:
        value = holds()
        if value:
            return value
        if time.monotonic() > end:
            raise AssertionError(f"waited {most:.0f} s in vain: {what}")
        time.sleep(0.05)


def processes_below(folder):
    """Pids of all processes whose working folder lies below `folder`: simulations that still run."""
    found = []
    for entry in pathlib.Path("/proc").iterdir():
        if not entry.name.isdigit():
            continue
        try:
            if os.readlink(entry / "cwd").startswith(str(folder)):
                found.append(int(entry.name))
        except OSError:
            continue
    return found


def runners_of(folder):
    """Pids of the drover-runner processes whose attempt lies below `folder`."""
    found = []
    for entry in pathlib.Path("/proc").iterdir():
        if not entry.name.isdigit():
            continue
        try:
            command = (entry / "cmdline").read_bytes().split(b"\0")
        except OSError:
            continue
        if command[0].endswith(b"drover-runner") and any(part.startswith(str(folder).encode()) for part in command):
            found.append(int(entry.name))
    return found


class Lab:
    def __init__(self):
        self.folder = pathlib.Path(tempfile.mkdtemp(prefix="drover-lab-"))
        self.data = self.folder / "data"
        self.address = f"unix:{self.folder}/s/c.sock"
        self.codes = self.folder / "codes"
        self.coordinator = None
        self.workers = {}
        self.started = []
        (self.folder / "times.toml").write_text(TIMES)

    # --- files ---

    def code(self, sleep=0.0, time_limit="1m", fail_right_of=None):
        place = self.codes / "peaks"
        place.mkdir(parents=True, exist_ok=True)
        arguments = [f'"--sleep", "{sleep}"']
        if fail_right_of is not None:
            arguments.append(f'"--fail-right-of", "{fail_right_of}"')
        text = CODE.format(program=BIN / "peaks-code", arguments=", ".join(arguments), time_limit=time_limit)
        (place / "code.toml").write_text(text)
        (place / "deck.txt.in").write_text("X = [=x=]\nY = [=y=]\n")
        for path in (self.codes, place, place / "code.toml", place / "deck.txt.in"):
            path.chmod(0o755 if path.is_dir() else 0o644)

    def study(self, name="peaks", runs=60, seed=7, search="", extra="", method="leapfrogging"):
        path = self.folder / f"{name}.toml"
        path.write_text(STUDY.format(name=name, runs=runs, seed=seed, search=search, method=method) + extra)
        return str(path)

    # --- processes ---

    def _start(self, arguments, log):
        out = open(self.folder / log, "ab")
        process = subprocess.Popen(arguments, stdout=out, stderr=out, stdin=subprocess.DEVNULL, cwd=self.folder,
                                   start_new_session=True)
        out.close()
        self.started.append(process)
        return process

    def start_coordinator(self, *options, wait=True):
        self.coordinator = self._start([BIN / "drover-coordinator", "serve", "--data", self.data, "--listen", self.address,
                                        "--config", self.folder / "times.toml", *options], "coordinator.log")
        if wait:
            eventually(lambda: self.drover("list")[0] == 0, "the coordinator answers")
        return self.coordinator

    def start_worker(self, name="w1", slots=2):
        self.workers[name] = self._start(
            [BIN / "drover-worker", "serve", "--coordinator", self.address, "--codes", self.codes, "--slots", str(slots),
             "--name", name, "--spool", self.folder / "spools" / name], f"{name}.log")
        return self.workers[name]

    def kill(self, process):
        process.send_signal(signal.SIGKILL)
        process.wait()

    def drover(self, *arguments, timeout=60):
        done = subprocess.run([BIN / "drover", *arguments, "--coordinator", self.address], capture_output=True, text=True,
                              timeout=timeout, stdin=subprocess.DEVNULL, cwd=self.folder)
        return done.returncode, done.stdout, done.stderr

    def json(self, *arguments):
        code, out, err = self.drover(*arguments, "--json")
        if code != 0:
            raise AssertionError(f"drover {' '.join(arguments)}: exit {code}\n{out}\n{err}\n{self.logs()}")
        return json.loads(out)

    def json_lines(self, *arguments):
        code, out, err = self.drover(*arguments, "--json")
        if code != 0:
            raise AssertionError(f"drover {' '.join(arguments)}: exit {code}\n{out}\n{err}")
        return [json.loads(line) for line in out.splitlines() if line]

    # --- questions ---

    def settled(self, study="peaks"):
        runs = self.json("show", study).get("runs", {})
        return int(runs.get("evaluated", 0)) + int(runs.get("failed", 0))

    def state(self, study="peaks"):
        return self.json("show", study)["state"]

    def wait_for_settled(self, count, study="peaks"):
        eventually(lambda: self.settled(study) >= count, f"{count} runs are settled")

    def wait_for_end(self, study="peaks", most=240.0):
        eventually(lambda: self.state(study) in ("finished", "stopped", "failed"), "the study ends", most)

    def table(self, study="peaks"):
        code, out, err = self.drover("table", study)
        assert code == 0, err
        return out

    def database(self):
        """Read-only rows of the store, for what no command shows."""
        import sqlite3
        connection = sqlite3.connect(f"file:{self.data}/store.sqlite?mode=ro", uri=True)
        return connection

    def logs(self):
        shown = []
        for path in sorted(self.folder.glob("*.log")):
            lines = path.read_text(errors="replace").splitlines()[-15:]
            shown.append(f"--- {path.name}\n" + "\n".join(lines))
        return "\n".join(shown)

    def close(self):
        for process in reversed(self.started):
            if process.poll() is None:
                process.terminate()
        for process in self.started:
            try:
                process.wait(timeout=20)
            except subprocess.TimeoutExpired:
                self.kill(process)
        left = runners_of(self.folder) + processes_below(self.folder / "spools")
        for pid in left:
            try:
                os.kill(pid, signal.SIGKILL)
            except ProcessLookupError:
                pass
        shutil.rmtree(self.folder, ignore_errors=True)
        return left


class LabTest(unittest.TestCase):
    def setUp(self):
        self.lab = Lab()
        self.addCleanup(self._close)

    def _close(self):
        failed = any(error for _, error in getattr(self._outcome, "errors", []) if error) or \
            bool(getattr(getattr(self._outcome, "result", None), "failures", []))
        if failed:
            print(self.lab.logs())
        self.lab.close()
