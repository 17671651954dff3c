#!/usr/bin/env python3
"""Times scipy's sparse LU on the system that network_bench wrote, in the same run as the engine.

usage: compare_scipy.py NETWORK_BENCH SEGMENTS [branching|mesh]

Checks the engine's answer first: scipy's residual with it, beside that with its own. Then one factorisation and
solution with each of scipy's orderings that suit a symmetric pattern; the best of them counts.
"""
import os
import re
import subprocess
import sys
import tempfile
import time

os.environ.setdefault("OMP_NUM_THREADS", "1")
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
import numpy as np  # noqa: E402
import scipy.sparse as sparse  # noqa: E402
import scipy.sparse.linalg as linalg  # noqa: E402


def read_system(path):
    with open(path, "rb") as file:
        size, entries = np.fromfile(file, np.int64, 2)
        columns = np.fromfile(file, np.int32, size + 1)
        rows = np.fromfile(file, np.int32, entries)
        values = np.fromfile(file, np.complex128, entries)
        right_side = np.fromfile(file, np.complex128, size)
        answer = np.fromfile(file, np.complex128, size)
    return sparse.csc_matrix((values, rows, columns), shape=(size, size)), right_side, answer


def backward_error(matrix, x, right_side):
    return np.abs(matrix @ x - right_side).max() / (abs(matrix) @ abs(x) + abs(right_side)).max()


def main():
    bench, segments = sys.argv[1:3]
    kind = sys.argv[3] if len(sys.argv) > 3 else "branching"
    with tempfile.TemporaryDirectory() as folder:
        path = os.path.join(folder, "system")
        printed = subprocess.run([bench, segments, kind, path], check=True, capture_output=True, text=True).stdout
        print(printed, end="")
        matrix, right_side, answer = read_system(path)
    own = backward_error(matrix, answer, right_side)
    print(f"  backward error of the engine's solution {own:.1e}")
    if own > 1e-12:
        sys.exit("the answer is wrong: nothing is timed")
    best = None
    # COLAMD, scipy's default, is left out: it fills the rows of the bases and took 17 s at 1e4 segments.
    for ordering, symmetric in (("MMD_AT_PLUS_A", True), ("MMD_AT_PLUS_A", False)):
        options = {"SymmetricMode": True} if symmetric else {}
        start = time.perf_counter()
        factor = linalg.splu(matrix, permc_spec=ordering, options=options,
                             diag_pivot_thresh=0.001 if symmetric else None)
        x = factor.solve(right_side)
        seconds = time.perf_counter() - start
        print(f"  scipy {ordering}{' symmetric' if symmetric else '':10s}  {seconds:8.3f} s"
              f"   backward error {backward_error(matrix, x, right_side):.1e}")
        best = seconds if best is None else min(best, seconds)
    everything = float(re.search(r"everything\s+([0-9.]+) s", printed).group(1))
    print(f"  everything, of scipy's best: {everything / best:.2f}")


if __name__ == "__main__":
    main()
