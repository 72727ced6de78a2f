"""A full disk under the store: nothing is acknowledged falsely, nothing is lost, and work goes on by itself when there is space.

The disk is a small tmpfs in a mount namespace of the test's own; where the machine does not allow one, the test says so and
the store's own test (tests/server/store) remains."""

import os
import pathlib
import subprocess
import sys
import unittest

from lab import LabTest, eventually


def inside():
    return os.environ.get("DROVER_FULL_DISK_INSIDE") == "1"


class FullDisk(LabTest):
    def setUp(self):
        super().setUp()
        self.lab.data.mkdir(mode=0o700)
        subprocess.run(["mount", "-t", "tmpfs", "-o", "size=16m,mode=0700", "tmpfs", self.lab.data], check=True)
        self.addCleanup(subprocess.run, ["umount", "-l", self.lab.data])

    def test_stops_acknowledging_and_goes_on_when_there_is_space(self):
        self.lab.code()
        self.lab.start_coordinator()
        self.lab.start_worker("w1", slots=2)
        study = self.lab.study(runs=40, method="space-filling")
        eventually(lambda: self.lab.drover("check", study)[0] == 0, "the code is known")
        ballast = self.lab.data / "ballast"
        self.assertEqual(self.lab.drover("start", study)[0], 0)
        self.lab.wait_for_settled(3)
        with open(ballast, "wb", buffering=0) as file:
            try:
                while True:
                    file.write(b"\0" * 4096)
            except OSError:
                pass
        log = self.lab.folder / "coordinator.log"
        eventually(lambda: "the disk is full" in log.read_text(), "the coordinator says that the disk is full")
        self.assertIsNone(self.lab.coordinator.poll(), "it serves on")
        acknowledged = self.lab.settled()  # reads go on
        ballast.unlink()
        self.lab.wait_for_end()
        self.assertGreaterEqual(self.lab.settled(), acknowledged)
        self.assertEqual(self.lab.settled(), 40)
        store = self.lab.database()
        self.assertEqual(store.execute("SELECT count(*) FROM attempt WHERE state = 'settled'").fetchone()[0], 40)
        self.assertEqual(store.execute("SELECT count(*) - max(number) FROM event").fetchone()[0], 0)
        store.close()
        self.lab.kill(self.lab.coordinator)
        self.lab.start_coordinator()  # which checks the chain of events
        self.assertEqual(self.lab.settled(), 40)


if __name__ == "__main__":
    if inside():
        unittest.main(verbosity=2)
    probe = subprocess.run(["unshare", "--user", "--map-root-user", "--mount", "true"], capture_output=True)
    if probe.returncode != 0:
        print("skipped: this machine allows no mount namespace")
        sys.exit(0)
    os.environ["DROVER_FULL_DISK_INSIDE"] = "1"
    os.execvp("unshare", ["unshare", "--user", "--map-root-user", "--mount", sys.executable, "-B", __file__])
