"""Wrong input of every kind: a clear error with its place, and nothing lost."""

import os
import shutil
import sqlite3
import subprocess
import unittest

from lab import BIN, Lab, LabTest, eventually


class WrongStudies(unittest.TestCase):
    """`drover check` against a coordinator with one worker; the words a user needs are in the answer."""

    @classmethod
    def setUpClass(cls):
        cls.lab = Lab()
        cls.lab.code()
        cls.lab.start_coordinator()
        cls.lab.start_worker("w1", slots=1)
        eventually(lambda: cls.lab.drover("check", cls.lab.study())[0] == 0, "the code is known")

    @classmethod
    def tearDownClass(cls):
        cls.lab.close()

    def expect(self, text, *words, command="check"):
        path = self.lab.folder / "wrong.toml"
        path.write_text(text)
        code, out, err = self.lab.drover(command, str(path))
        self.assertEqual(code, 2, out + err)
        for word in words:
            self.assertIn(word, err)
        return err

    def good(self):
        return (self.lab.folder / "peaks.toml").read_text()

    def place(self, text, line):
        """'file:line:' of the line that holds `line`."""
        number = [n for n, one in enumerate(text.splitlines(), 1) if line in one][0]
        return f"wrong.toml:{number}:"

    def test_malformed_toml(self):
        text = self.good().replace("low = -3", "low = = -3", 1)
        self.expect(text, self.place(text, "low = = -3"))

    def test_an_unknown_key(self):
        text = self.good().replace("low = -3", "lwo = -3", 1)
        self.expect(text, self.place(text, "lwo"), "lwo", "low")

    def test_low_not_below_high(self):
        text = self.good().replace("high = 3", "high = -4", 1)
        self.expect(text, "wrong.toml:", "-4")

    def test_a_unit_of_another_dimension(self):
        text = self.good().replace('unit = "m"', 'unit = "bar"', 1)
        self.expect(text, self.place(text, "bar"), "bar", "m")

    def test_an_unknown_code_names_the_nearest(self):
        text = self.good().replace('code = "peaks"', 'code = "paeks"')
        self.expect(text, self.place(text, "paeks"), "paeks", "peaks")

    def test_an_output_that_the_code_does_not_have(self):
        text = self.good().replace('minimise = "height"', 'minimise = "heigth"')
        self.expect(text, self.place(text, "heigth"), "heigth", "height")

    def test_several_mistakes_are_shown_at_once(self):
        text = self.good().replace('minimise = "height"', 'minimise = "weight"').replace("high = 3", "high = -4", 1)
        err = self.expect(text, "weight", "-4")
        self.assertGreaterEqual(err.count("wrong.toml:"), 2)

    def test_a_study_name_that_is_taken(self):
        path = self.lab.study(name="taken", runs=2)
        self.assertEqual(self.lab.drover("start", path)[0], 0)
        code, out, err = self.lab.drover("start", path)
        self.assertEqual(code, 2, out + err)
        self.assertIn("taken", err)
        self.assertEqual(len([s for s in self.lab.json_lines("list") if s["name"] == "taken"]), 1)

    def test_a_study_that_is_not_there_names_the_nearest(self):
        path = self.lab.study(name="hillside", runs=2)
        self.assertEqual(self.lab.drover("start", path)[0], 0)
        code, out, err = self.lab.drover("show", "hilside")
        self.assertEqual(code, 2, out + err)
        self.assertIn("hillside", err)


class WrongFolders(LabTest):
    def serve(self, data, *options):
        return subprocess.run([BIN / "drover-coordinator", "serve", "--data", data, "--listen", f"unix:{self.lab.folder}/t/c.sock",
                               *options], capture_output=True, text=True, timeout=30, stdin=subprocess.DEVNULL)

    def test_a_second_coordinator_is_refused_and_the_first_goes_on(self):
        self.lab.start_coordinator()
        alias = self.lab.folder / "alias"
        alias.symlink_to(self.lab.data)
        for folder in (self.lab.data, alias):
            done = self.serve(folder)
            self.assertNotEqual(done.returncode, 0)
            self.assertIn("in use by another coordinator", done.stderr)
        self.assertEqual(self.lab.drover("list")[0], 0)

    def test_a_folder_that_is_not_ours(self):
        folder = self.lab.folder / "letters"
        folder.mkdir(mode=0o700)
        (folder / "to_mother.txt").write_text("dear")
        done = self.serve(folder)
        self.assertEqual(done.returncode, 2)
        self.assertIn("holds other files", done.stderr)
        self.assertEqual([p.name for p in folder.iterdir()], ["to_mother.txt"])

    def test_somebody_elses_database(self):
        folder = self.lab.folder / "other"
        folder.mkdir(mode=0o700)
        connection = sqlite3.connect(folder / "store.sqlite")
        connection.execute("CREATE TABLE recipes(name TEXT)")
        connection.commit()
        connection.close()
        done = self.serve(folder)
        self.assertEqual(done.returncode, 2)
        self.assertIn("another program", done.stderr)

    def test_a_newer_schema(self):
        self.lab.start_coordinator()
        self.lab.coordinator.terminate()
        self.assertEqual(self.lab.coordinator.wait(timeout=20), 0)
        connection = sqlite3.connect(self.lab.data / "store.sqlite")
        connection.execute("PRAGMA user_version = 1000")
        connection.close()
        done = self.serve(self.lab.data)
        self.assertEqual(done.returncode, 2)
        self.assertIn("version 1000", done.stderr)

    def test_a_log_that_was_deleted_is_noticed(self):
        self.lab.start_coordinator()
        self.lab.kill(self.lab.coordinator)
        (self.lab.data / "store.sqlite-wal").unlink()
        done = self.serve(self.lab.data)
        self.assertNotEqual(done.returncode, 0)
        self.assertIn("missing", done.stderr)

    def test_a_flipped_byte_is_noticed(self):
        self.lab.start_coordinator()
        self.lab.coordinator.terminate()
        self.lab.coordinator.wait(timeout=20)
        store = self.lab.data / "store.sqlite"
        connection = sqlite3.connect(store)
        event = connection.execute("SELECT bytes FROM event WHERE number = 1").fetchone()[0]
        connection.close()
        raw = bytearray(store.read_bytes())
        at = raw.find(event) + len(event) // 2
        raw[at] ^= 1
        store.write_bytes(raw)
        done = self.serve(self.lab.data)
        self.assertNotEqual(done.returncode, 0)
        self.assertIn("chain of events is broken", done.stderr)

    def test_a_tcp_address_needs_trust_and_loopback(self):
        for listen, word in (("127.0.0.1:0", "--trust-everyone-on-this-host"), ("0.0.0.0:0", "certificates")):
            done = subprocess.run([BIN / "drover-coordinator", "serve", "--data", self.lab.data, "--listen", listen],
                                  capture_output=True, text=True, timeout=30)
            self.assertEqual(done.returncode, 2)
            self.assertIn(word, done.stderr)

    def test_a_wrong_configuration_file(self):
        config = self.lab.folder / "wrong.toml"
        for text, word in (("[times]\nleese = \"2s\"\n", "wrong.toml:2:1: unknown key leese; did you mean lease?"),
                           ("[licences]\nsurge = -1\n", "wrong.toml:2:9"), ("[times]\nlease = \"2 weeks\"\n", "wrong.toml:2:9"),
                           ("[times\n", "wrong.toml:1:")):
            config.write_text(text)
            done = self.serve(self.lab.data, "--config", config)
            self.assertEqual(done.returncode, 2)
            self.assertIn(word, done.stderr)

    def test_no_coordinator_is_exit_3(self):
        code, out, err = self.lab.drover("list")
        self.assertEqual(code, 3, out + err)


class Codes(LabTest):
    def codes(self):
        return subprocess.run([BIN / "drover-worker", "codes", "--codes", self.lab.codes], capture_output=True, text=True, timeout=30)

    def test_a_good_definition_is_listed(self):
        self.lab.code()
        done = self.codes()
        self.assertEqual(done.returncode, 0, done.stderr)
        self.assertIn("peaks", done.stdout)

    def test_a_wrong_definition_says_where(self):
        self.lab.code()
        path = self.lab.codes / "peaks" / "code.toml"
        path.write_text(path.read_text().replace("time_limit", "time_limt"))
        done = self.codes()
        self.assertEqual(done.returncode, 2)
        self.assertIn("code.toml:6:1: unknown key time_limt in [code]; did you mean time_limit?", done.stdout + done.stderr)


if __name__ == "__main__":
    unittest.main(verbosity=2)
