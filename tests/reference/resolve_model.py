#!/usr/bin/python3
"""Lets idlewire solve a model and resolve_network.py solve it anew.

    resolve_model.py IDLEWIRE MODEL
"""

import pathlib
import subprocess
import sys
import tempfile

import resolve_network


def main(program, model):
    with tempfile.TemporaryDirectory() as folder:
        files = []
        for command in ("network", "predict"):
            files.append(str(pathlib.Path(folder) / f"{command}.json"))
            run = subprocess.run([program, command, model, "--quiet", "--json", files[-1]], stdout=subprocess.DEVNULL)
            if run.returncode:
                print(f"idlewire {command} {model} ended with {run.returncode}", file=sys.stderr)
                return 2
        return resolve_network.main(files)


if __name__ == "__main__":
    sys.exit(main(*sys.argv[1:]))
