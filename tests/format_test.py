"""Every C++ file is laid out as .clang-format says."""

import pathlib
import subprocess
import tempfile
import unittest

import tree


def misplaced(files):
    """What clang-format would change in the files, as its own messages; empty if nothing."""
    command = ["clang-format-14", "--dry-run", "--Werror", f"--style=file:{tree.TOP / '.clang-format'}"]
    run = subprocess.run(command + [str(f) for f in files], capture_output=True, text=True)
    return run.stderr if run.returncode else ""


class Format(unittest.TestCase):
    def test_every_file_is_laid_out(self):
        files = tree.sources()
        self.assertGreater(len(files), 40)  # a search that finds nothing would pass
        messages = misplaced(files)
        named = sorted({line.split(":")[0] for line in messages.splitlines() if ": error:" in line})
        self.assertFalse(messages, "run clang-format-14 -i on: " + " ".join(named))

    def test_a_planted_slip_is_found(self):
        with tempfile.TemporaryDirectory() as folder:
            planted = pathlib.Path(folder) / "planted.cpp"
            planted.write_text("int  f( ) { return 1 ; }\n")
            self.assertIn("planted.cpp", misplaced([planted]))


if __name__ == "__main__":
    unittest.main()
