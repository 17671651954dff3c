"""What the tests of the source tree itself share: where it is, and which files are ours."""

import pathlib

TOP = pathlib.Path(__file__).resolve().parent.parent
CODE_FOLDERS = ("engine", "netlists", "io", "tests", "benchmarks")


def sources(top=TOP, folders=CODE_FOLDERS):
    """Every C++ file under the given folders, sorted."""
    found = []
    for folder in folders:
        for pattern in ("*.h", "*.cpp"):
            found += (top / folder).rglob(pattern)
    return sorted(found)
