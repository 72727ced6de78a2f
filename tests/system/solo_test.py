"""`drover solo` as an ordinary user calls it: one command, results at the end; killed, it goes on when called again."""

import csv
import json
import os
import pathlib
import signal
import subprocess
import unittest

from lab import BIN, LabTest, eventually


class Solo(LabTest):
    def setUp(self):
        super().setUp()
        self.results = self.lab.folder / "peaks.drover"

    def arguments(self, study):
        return [BIN / "drover", "solo", study, "--codes", self.lab.codes, "--slots", "2"]

    def solo(self, study, timeout=240):
        return subprocess.run(self.arguments(study), capture_output=True, text=True, timeout=timeout,
                              stdin=subprocess.DEVNULL, cwd=self.lab.folder)

    def rows(self):
        with open(self.results / "table.csv", newline="") as file:
            return list(csv.DictReader(file))

    def daemons(self):
        """Pids of coordinators and workers that use this data folder."""
        found = []
        for entry in pathlib.Path("/proc").iterdir():
            try:
                command = (entry / "cmdline").read_bytes() if entry.name.isdigit() else b""
            except OSError:
                continue
            if str(self.lab.folder).encode() in command and (b"drover-coordinator" in command or b"drover-worker" in command):
                found.append(int(entry.name))
        return found

    def test_runs_a_study_and_leaves_its_results(self):
        self.lab.code()
        done = self.solo(self.lab.study(runs=30))
        self.assertEqual(done.returncode, 0, done.stdout + done.stderr)
        self.assertEqual(len(self.rows()), 30)
        best = json.loads((self.results / "best.json").read_text())
        self.assertTrue(best)
        eventually(lambda: not self.daemons(), "its daemons have ended", 20)
        again = self.solo(self.lab.study(runs=30))
        self.assertEqual(again.returncode, 0, again.stderr)
        self.assertEqual(len(self.rows()), 30)

    def test_goes_on_after_a_kill(self):
        self.lab.code(sleep=0.2)
        study = self.lab.study(runs=30, method="space-filling")
        process = subprocess.Popen(self.arguments(study), stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL,
                                   stdin=subprocess.DEVNULL, cwd=self.lab.folder)
        store = self.results / "coordinator" / "store.sqlite"
        eventually(lambda: store.exists() and self.settled_in(store) >= 5, "five runs are settled")
        process.send_signal(signal.SIGKILL)
        process.wait()
        eventually(lambda: not self.daemons(), "its daemons end with it", 30)
        before = self.settled_in(store)
        done = self.solo(study)
        self.assertEqual(done.returncode, 0, done.stdout + done.stderr)
        self.assertGreaterEqual(before, 5)
        self.assertEqual(self.settled_in(store), 30)
        self.assertEqual(len(self.rows()), 30)

    def test_ends_well_at_ctrl_c_and_goes_on(self):
        self.lab.code(sleep=0.2)
        study = self.lab.study(runs=20, method="space-filling")
        process = subprocess.Popen(self.arguments(study), stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
                                   stdin=subprocess.DEVNULL, cwd=self.lab.folder)
        store = self.results / "coordinator" / "store.sqlite"
        eventually(lambda: store.exists() and self.settled_in(store) >= 3, "three runs are settled")
        process.send_signal(signal.SIGINT)
        out, err = process.communicate(timeout=60)
        self.assertEqual(process.returncode, 1, out + err)
        self.assertIn("solo", err)  # how to go on
        eventually(lambda: not self.daemons(), "its daemons have ended", 20)
        done = self.solo(study)
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertEqual(self.settled_in(store), 20)

    def settled_in(self, store):
        import sqlite3
        try:
            connection = sqlite3.connect(f"file:{store}?mode=ro", uri=True)
            count = connection.execute("SELECT count(*) FROM run WHERE life = 'settled'").fetchone()[0]
            connection.close()
            return count
        except sqlite3.Error:
            return 0


if __name__ == "__main__":
    unittest.main(verbosity=2)
