"""Includes run one way, io -> netlists -> engine, as the #include lines themselves say."""

import pathlib
import re
import tempfile
import unittest

import tree

# What a file of each folder may include of ours. Tests of a folder see what the folder sees; the
# tests of the building read their models through io.
MAY_INCLUDE = {
    "engine": {"engine"},
    "netlists": {"engine", "netlists"},
    "io": {"engine", "netlists", "io"},
    "tests/engine": {"engine", "tests"},
    "tests/netlists": {"engine", "netlists", "io", "tests"},
}
FOLDERS = ("engine", "netlists", "io", "tests", "benchmarks")
# Only io reads and writes files; the two folders below it are handed what they need.
FILES_AND_TERMINAL = re.compile(r"#\s*include\s*<(fstream|filesystem|iostream|cstdio|stdio\.h|unistd\.h)>")
INCLUDE = re.compile(r'^\s*#\s*include\s*[<"]([^>"]+)[>"]', re.MULTILINE)


def wrong_includes(top):
    """Lines 'file: includes X' for each include that runs the wrong way or leaves its folder's trade."""
    wrong = []
    for path in tree.sources(top, ("engine", "netlists", "io", "tests/engine", "tests/netlists")):
        name = path.relative_to(top).as_posix()
        folder = next(f for f in sorted(MAY_INCLUDE, key=len, reverse=True) if name.startswith(f + "/"))
        text = path.read_text(encoding="utf-8")
        for included in INCLUDE.findall(text):
            owner = included.split("/")[0]
            if included.startswith("."):
                wrong.append(f"{name}: includes {included} by a relative path")
            elif owner in FOLDERS and owner not in MAY_INCLUDE[folder]:
                wrong.append(f"{name}: includes {included}")
        if folder in ("engine", "netlists") and FILES_AND_TERMINAL.search(text):
            wrong.append(f"{name}: touches disk or terminal")
    return wrong


class Includes(unittest.TestCase):
    def test_all_run_one_way(self):
        self.assertGreater(len(tree.sources(folders=("engine", "netlists", "io"))), 30)
        self.assertEqual(wrong_includes(tree.TOP), [])

    def test_planted_ones_are_found(self):
        planted = {
            "engine/a.h": '#include "netlists/building.h"\n',
            "engine/b.cpp": '#include <vector>\n#  include "io/writers.h"\n',
            "netlists/c.cpp": "#include <io/writers.h>\n",
            "netlists/d.cpp": "#include <fstream>\n",
            "io/e.cpp": '#include "../engine/solve.h"\n',
        }
        sound = {"io/f.cpp": '#include "netlists/lower.h"\n#include <fstream>\n'}
        with tempfile.TemporaryDirectory() as folder:
            top = pathlib.Path(folder)
            for name, text in {**planted, **sound}.items():
                (top / name).parent.mkdir(exist_ok=True)
                (top / name).write_text(text)
            found = {line.split(":")[0] for line in wrong_includes(top)}
        self.assertEqual(found, set(planted))


if __name__ == "__main__":
    unittest.main()
