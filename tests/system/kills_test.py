"""kill -9 of the coordinator, of a worker, of a runner in the middle of a study: nothing acknowledged is lost, nothing counts
twice, and the study comes to its planned end."""

import os
import signal
import unittest

from lab import LabTest, eventually, processes_below, runners_of

RUNS = 60


class Kills(LabTest):
    def setUp(self):
        super().setUp()
        # A daemon's restart must find runs that go on, however slow the machine is.
        self.lab.code(sleep=1.0 if "worker" in self._testMethodName else 0.1)
        self.runs = 24 if "worker" in self._testMethodName else RUNS
        self.lab.start_coordinator()
        self.lab.start_worker("w1", slots=2)
        self.start_study()

    def start_study(self):
        eventually(lambda: self.lab.drover("check", self.lab.study(runs=self.runs, method="space-filling"))[0] == 0, "the code is known")
        code, out, err = self.lab.drover("start", self.lab.study(runs=self.runs, method="space-filling"))
        self.assertEqual(code, 0, err)

    def expect_as_planned(self):
        self.lab.wait_for_end()
        self.assertEqual(self.lab.state(), "finished", self.lab.logs())
        self.assertEqual(self.lab.settled(), self.runs)
        store = self.lab.database()
        settled = store.execute("SELECT count(*), count(DISTINCT id) FROM run WHERE life = 'settled'").fetchone()
        self.assertEqual(settled, (self.runs, self.runs))
        # One settling report a run, and every candidate was learned once.
        self.assertEqual(store.execute("SELECT count(*) FROM attempt WHERE state = 'settled'").fetchone()[0], self.runs)
        self.assertEqual(store.execute("SELECT count(*), max(position) FROM learned").fetchone(), (self.runs, self.runs))
        store.close()

    def test_of_the_coordinator_lose_and_repeat_nothing(self):
        for least in (5, 20, 35):
            self.lab.wait_for_settled(least)
            before = self.lab.settled()
            self.lab.kill(self.lab.coordinator)
            self.lab.start_coordinator()
            self.assertGreaterEqual(self.lab.settled(), before)
        self.expect_as_planned()

    def test_of_the_worker_lose_no_settled_run_and_leave_no_process(self):
        for least in (3, 12):
            self.lab.wait_for_settled(least)
            self.lab.kill(self.lab.workers["w1"])
            self.lab.start_worker("w1", slots=2)
        self.expect_as_planned()
        self.expect_lost(1)
        eventually(lambda: not processes_below(self.lab.folder / "spools"), "no simulation is left")

    def test_of_a_runner_make_the_run_wait_again(self):
        self.lab.wait_for_settled(5)
        # One that was about to end anyway may have written its record already; so kill until two runs were hit.
        while self.lost() < 2:
            for runner in runners_of(self.lab.folder)[:1]:
                try:
                    os.kill(runner, signal.SIGKILL)
                except ProcessLookupError:
                    pass
            self.assertNotEqual(self.lab.state(), "finished", "the study ended before two runs were hit")
        self.expect_as_planned()

    def lost(self):
        store = self.lab.database()
        lost = store.execute("SELECT count(*) FROM attempt WHERE state = 'lost'").fetchone()[0]
        store.close()
        return lost

    def expect_lost(self, least):
        """So many attempts really were lost on the way: else the kills hit nothing, and the test proved nothing."""
        self.assertGreaterEqual(self.lost(), least)

    def test_of_everything_at_once(self):
        self.lab.wait_for_settled(10)
        self.lab.kill(self.lab.coordinator)
        self.lab.kill(self.lab.workers["w1"])
        self.lab.start_worker("w1", slots=2)
        self.lab.start_coordinator()
        self.expect_as_planned()


class Outages(LabTest):
    def test_results_wait_in_the_spool_while_the_coordinator_is_away(self):
        self.lab.code(sleep=0.5)
        self.lab.start_coordinator()
        self.lab.start_worker("w1", slots=2)
        study = self.lab.study(runs=6, method="space-filling")
        eventually(lambda: self.lab.drover("check", study)[0] == 0, "the code is known")
        self.assertEqual(self.lab.drover("start", study)[0], 0)
        eventually(lambda: runners_of(self.lab.folder), "a run goes on")
        before = self.lab.settled()
        self.lab.kill(self.lab.coordinator)
        spool = self.lab.folder / "spools" / "w1" / "attempts"
        waiting = eventually(
            lambda: [p for p in spool.iterdir() if (p / "report").exists() and not (p / "receipt").exists()],
            "a report waits in the spool")
        self.lab.start_coordinator()
        eventually(lambda: all((p / "receipt").exists() for p in waiting), "it is delivered")
        self.assertGreater(self.lab.settled(), before)
        self.lab.wait_for_end()
        self.assertEqual(self.lab.settled(), 6)

    def test_a_runner_writes_its_record_though_its_daemon_is_gone(self):
        self.lab.code(sleep=1.0)
        self.lab.start_coordinator()
        self.lab.start_worker("w1", slots=1)
        study = self.lab.study(runs=2, method="space-filling")
        eventually(lambda: self.lab.drover("check", study)[0] == 0, "the code is known")
        self.assertEqual(self.lab.drover("start", study)[0], 0)
        spool = self.lab.folder / "spools" / "w1" / "attempts"
        begun = eventually(lambda: spool.exists() and list(spool.glob("*/begun")), "a run has begun")[0]
        self.lab.kill(self.lab.workers["w1"])
        record = eventually(lambda: (begun.parent / "ended").exists() and (begun.parent / "ended").read_text(), "its end is recorded")
        self.assertIn("cause exited\n", record)
        self.assertIn("exit_code 0\n", record)


if __name__ == "__main__":
    unittest.main(verbosity=2)
