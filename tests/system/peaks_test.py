"""The peaks function through the whole system: separate processes, real files."""

import unittest

from lab import LabTest, eventually

# Least value of the peaks function and where it lies (evaluated to the digits shown; the function from memory).
LEAST, X, Y = -6.5511, 0.228, -1.626


class Peaks(LabTest):
    def test_is_found_to_four_digits(self):
        self.lab.code()
        self.lab.start_coordinator()
        self.lab.start_worker("w1", slots=4)
        # In candidate order the search is the same on every machine; so is the valley it ends in.
        search = 'order = "candidate"\nparallel = 4\nlook_ahead = 12\npopulation = 50\ntolerance = 1e-3'
        study = self.lab.study(runs=2000, seed=3, search=search)
        eventually(lambda: self.lab.drover("check", study)[0] == 0, "the code is known")
        self.assertEqual(self.lab.drover("start", study)[0], 0)
        self.lab.wait_for_end(most=360)
        show = self.lab.json("show", "peaks")
        self.assertEqual((show["state"], show["reason"]), ("finished", "converged"))
        best = self.lab.json("best", "peaks")["best"]
        values = {value["name"]: value["value"] for value in best["values"]}
        height = best["objectives"][0]["value"]
        print(f"peaks: {height:.6f} at ({values['x']:.4f}, {values['y']:.4f}) after {self.lab.settled()} runs")
        self.assertAlmostEqual(height, LEAST, delta=1e-4)
        self.assertAlmostEqual(values["x"], X, delta=0.01)
        self.assertAlmostEqual(values["y"], Y, delta=0.01)


if __name__ == "__main__":
    unittest.main(verbosity=2)
