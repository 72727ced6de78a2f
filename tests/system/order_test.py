"""order = "candidate": the list of candidates is the same with 1, 2 and 7 slots, with and without kills; and look-ahead many
asks are out."""

import unittest

from lab import Lab, LabTest, eventually

RUNS = 60
SEARCH = 'order = "candidate"\nparallel = 2\nlook_ahead = 6\npopulation = 10'


def candidates(lab, slots, kills):
    """The whole table of a study run so; the processes are ended."""
    lab.code(sleep=0.02, fail_right_of=2.0)
    lab.start_coordinator()
    lab.start_worker("w1", slots)
    study = lab.study(runs=RUNS, search=SEARCH)
    eventually(lambda: lab.drover("check", study)[0] == 0, "the code is known")
    assert lab.drover("start", study)[0] == 0
    if kills:
        lab.wait_for_settled(8)
        lab.kill(lab.coordinator)
        lab.start_coordinator()
        lab.wait_for_settled(25)
        lab.kill(lab.workers["w1"])
        lab.start_worker("w1", slots)
    lab.wait_for_end()
    return lab.table()


class CandidateOrder(LabTest):
    def run_lab(self, slots, kills=False):
        lab = Lab()
        try:
            return candidates(lab, slots, kills)
        except AssertionError as error:
            raise AssertionError(f"{error}\n{lab.logs()}") from error
        finally:
            lab.close()

    def test_gives_the_same_candidates_whatever_the_slots_and_the_kills(self):
        alone = self.run_lab(1)
        self.assertEqual(len(alone.splitlines()), RUNS + 1)
        for slots, kills in ((2, False), (7, False), (1, True), (2, True), (7, True)):
            with self.subTest(slots=slots, kills=kills):
                self.assertEqual(self.run_lab(slots, kills), alone)

    def test_keeps_look_ahead_many_asks_out(self):
        self.lab.code(sleep=30)
        self.lab.start_coordinator()
        self.lab.start_worker("w1", 1)
        study = self.lab.study(runs=RUNS, search=SEARCH)
        eventually(lambda: self.lab.drover("check", study)[0] == 0, "the code is known")
        self.assertEqual(self.lab.drover("start", study)[0], 0)
        eventually(lambda: self.lab.json("show", "peaks").get("candidates", 0) == 6, "six asks are out, with one slot")
        store = self.lab.database()
        asks = store.execute("SELECT number, learned_through FROM ask ORDER BY number").fetchall()
        store.close()
        self.assertEqual(asks, [(n, 0) for n in range(1, 7)])


if __name__ == "__main__":
    unittest.main(verbosity=2)
