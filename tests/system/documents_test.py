"""The examples that the documents print are run as they stand there."""

import pathlib
import re
import subprocess
import textwrap
import unittest

from lab import BIN, SOURCE, LabTest


class Documents(LabTest):
    def write(self, name, text, mode=0o644):
        path = self.lab.folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text)
        path.chmod(mode)

    def solo(self, study):
        done = subprocess.run([BIN / "drover", "solo", study], capture_output=True, text=True, timeout=240,
                              stdin=subprocess.DEVNULL, cwd=self.lab.folder)
        self.assertEqual(done.returncode, 0, done.stdout + done.stderr)
        return done.stdout

    def test_the_beam_of_the_code_file_page(self):
        text = (SOURCE / "docs" / "code-file.md").read_text()
        script = re.search(r"```python\n(.*?)```", text, re.S).group(1)
        template = re.search(r"`codes/beam/beam.in.in`:\n\n((?:    .*\n)+)", text).group(1)
        definition, study = re.findall(r"```toml\n(.*?)```", text, re.S)[:2]
        self.write("codes/beam/beam.py", script, 0o755)
        self.write("codes/beam/beam.in.in", textwrap.dedent(template))
        self.write("codes/beam/code.toml", definition)
        self.write("beam.toml", study)
        self.assertIn("deflection", self.solo("beam.toml"))

    def test_the_study_of_ones_own_in_the_readme(self):
        text = (SOURCE / "README.md").read_text()
        blocks = [textwrap.dedent(block) for block in re.findall(r"(?:^    .*\n)+", text, re.M)]
        script = next(block for block in blocks if block.startswith("#!/usr/bin/env python3"))
        template = next(block for block in blocks if block.startswith("x = [=x=]"))
        definition = next(block for block in blocks if block.startswith("[code]"))
        study = next(block for block in blocks if block.startswith("study     ="))
        self.write("codes/hill/height.py", script, 0o755)
        self.write("codes/hill/deck.txt.in", template)
        self.write("codes/hill/code.toml", definition)
        self.write("study.toml", study)
        self.assertIn("converged", self.solo("study.toml"))


if __name__ == "__main__":
    unittest.main(verbosity=2)
