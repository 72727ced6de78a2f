"""What no compiler checks: includes that climb, files that grow, names that say nothing."""

import os
import pathlib
import re
import unittest

SOURCE = pathlib.Path(os.environ["DROVER_SOURCE"])
FOLDERS = ("proto", "server", "worker", "client", "tests", "docs/examples")
TOP = {"CMakeLists.txt", "README.md", "DEVELOPERS.md", "proto", "server", "worker", "client", "tests", "deploy", "docs", "build",
       "CMakePresets.json"}


def sources():
    for folder in FOLDERS:
        for path in sorted((SOURCE / folder).rglob("*")):
            if path.suffix in (".h", ".cc", ".proto", ".py"):
                yield path


class Layout(unittest.TestCase):
    def test_no_include_climbs_out_of_its_folder(self):
        wrong = [str(path) for path in sources() if re.search(r'#include\s+"\.\./', path.read_text())]
        self.assertEqual(wrong, [])

    def test_no_file_outgrows_a_reader(self):
        wrong = [str(path) for path in sources() if len(path.read_text().splitlines()) > 600]
        self.assertEqual(wrong, [])

    def test_file_names_say_what_is_in_them(self):
        wrong = [str(path) for path in sources() if re.search(r"(^|_)(util|utils|misc|common|helper|helpers|manager)(_|\.|$)", path.name)]
        self.assertEqual(wrong, [])

    def test_clocks_and_randomness_are_read_in_few_places(self):
        allowed = {"proto/link/clock.cc", "proto/link/channel.cc", "server/service/server.cc", "server/service/study_polls.cc",
                   "worker/process/leftovers.cc", "worker/runner/supervise.cc"}
        pattern = re.compile(r"system_clock::now|steady_clock::now|absl::Now\(|std::random_device|\brand\(\)|std::uniform_")
        wrong = []
        for path in sources():
            name = str(path.relative_to(SOURCE))
            product = name.startswith(("server/", "worker/", "proto/"))
            if product and name not in allowed and pattern.search(path.read_text()):
                wrong.append(name)
        self.assertEqual(wrong, [])

    def test_the_top_level_holds_what_it_should(self):
        entries = {entry.name for entry in SOURCE.iterdir() if not entry.name.startswith(".")}
        self.assertEqual(entries - TOP, set())


if __name__ == "__main__":
    unittest.main(verbosity=2)
