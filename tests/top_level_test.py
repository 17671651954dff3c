"""The top level holds nothing but what is agreed, and each folder says what lives there."""

import unittest

import tree

FILES = {"CMakeLists.txt", "CMakePresets.json", "README.md", "DEVELOPERS.md", "LICENSE"}
FOLDERS = {"engine", "netlists", "io", "tests", "examples", "benchmarks"}
BUILT = {"build"}  # ignored by git


def strangers(names):
    """The names that have no place at the top level. Dotfiles have."""
    return sorted(n for n in names if not n.startswith(".") and n not in FILES | FOLDERS | BUILT)


class TopLevel(unittest.TestCase):
    def test_nothing_else(self):
        names = {path.name for path in tree.TOP.iterdir()}
        self.assertEqual(strangers(names), [])
        self.assertEqual((FILES | FOLDERS) - names, set())

    def test_a_planted_stranger_is_found(self):
        self.assertEqual(strangers({"engine", "notes.txt", ".clang-tidy"}), ["notes.txt"])

    def test_each_folder_has_its_readme(self):
        without = [f for f in sorted(FOLDERS) if not (tree.TOP / f / "README.md").is_file()]
        self.assertEqual(without, [])


if __name__ == "__main__":
    unittest.main()
