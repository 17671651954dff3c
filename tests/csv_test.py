"""The rows of --csv are RFC 4180 as Python's csv module reads it, and say what --json says."""

import csv
import io
import json
import os
import subprocess
import unittest

import tree


def output(*arguments):
    run = subprocess.run([os.environ["IDLEWIRE"], "predict", *arguments, "--quiet"], capture_output=True)
    if run.returncode:
        raise AssertionError(f"idlewire predict {' '.join(arguments)} ended with {run.returncode}: {run.stderr}")
    return run.stdout.decode("utf-8")


class Csv(unittest.TestCase):
    def setUp(self):
        self.model = str(tree.TOP / "examples" / "03-isolated-supply" / "equal.yaml")
        self.text = output(self.model, "--csv", "-")
        self.rows = list(csv.DictReader(io.StringIO(self.text, newline=""), strict=True))

    def test_every_line_ends_as_the_standard_wants(self):
        self.assertTrue(self.text.endswith("\r\n"))
        self.assertEqual(self.text.count("\n"), self.text.count("\r\n"))
        self.assertEqual(self.text.count("\r\n"), len(self.rows) + 1)
        self.assertTrue(all(None not in row and None not in row.values() for row in self.rows))

    def test_one_row_a_reading_with_the_figures_of_the_json(self):
        findings = json.loads(output(self.model, "--json", "-"))
        expected = []
        for c in findings["conductors"]:
            for p in c["places"]:
                for r in p["readings"]:
                    expected.append((c["id"], c["condition"], c["misleads"]["how"], p["place"], r["instrument"],
                                     r["reference"], r["volts"], r["appearance"], r["judged"],
                                     p["open_circuit"]["volts"], p["source_impedance"]["ohms"], p["short_circuit_A"]))
        given = [(r["conductor"], r["condition"], r["misleads"], r["place"], r["instrument"], r["reference"],
                  float(r["reading_V"]), r["appearance"], r["judged"] == "yes", float(r["open_circuit_V"]),
                  float(r["source_impedance_ohm"]), float(r["short_circuit_A"])) for r in self.rows]
        self.assertGreater(len(expected), 20)
        self.assertEqual(given, expected)

    def test_every_row_carries_a_caution(self):
        for row in self.rows:
            self.assertRegex(row["caution"], "not a test|no reading to ground settles it")
        isolated = [r for r in self.rows if r["conductor"].startswith("IP1-1.line")]
        self.assertTrue(isolated)
        self.assertTrue(all("isolated" in r["caution"] for r in isolated))

    def test_two_results_cannot_share_standard_output(self):
        run = subprocess.run([os.environ["IDLEWIRE"], "predict", self.model, "--csv", "-", "--json", "-"],
                             capture_output=True, text=True)
        self.assertEqual((run.returncode, run.stdout), (2, ""))
        self.assertIn("only one result", run.stderr)


if __name__ == "__main__":
    unittest.main()
