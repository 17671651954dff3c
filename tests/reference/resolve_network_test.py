"""The reference solver itself, held against closed forms, and against answers that are wrong."""

import contextlib
import copy
import io
import json
import pathlib
import tempfile
import unittest

import mpmath
import resolve_network
from mpmath import mpc, mpf

HOT, FLOATING, LENGTH, OMEGA = 1, 3, 30, 2 * mpmath.pi * 60


def two_wires(cells=1):
    """A live wire and a floating one over earth; node 1 feeds the live wire, node 3 floats."""
    return {
        "format": "idlewire-network/1",
        "frequency_Hz": 60.0,
        "nodes": ["earth", "hot@P", "hot@J", "f@P", "f@J"],
        "at": {"hot@P": 1, "hot@J": 2, "f@P": 3, "f@J": 4},
        "lines": [{
            "run": "C1", "length_m": float(LENGTH), "cells": cells, "conductors": ["hot", "f"],
            "from": [1, 3], "to": [2, 4],
            "impedance_ohm_per_m": {"re": [[5e-3, 0.0], [0.0, 5e-3]], "im": [[2e-4, 1e-4], [1e-4, 2e-4]]},
            "capacitance_F_per_m": [[50e-12, -30e-12], [-30e-12, 40e-12]],
            "conductance_S_per_m": [[0.0, 0.0], [0.0, 0.0]],
        }],
        "elements": [],
        "sources": [{"what": "T1 A", "between": [1, 0], "volts": [120.0, 0.0], "impedance_ohm": [1e-9, 0.0]}],
        "solution_V": [],
    }


def solved(file):
    system = resolve_network.System(resolve_network.Network(file))
    return system, system.solve(system.sources())


class Reference(unittest.TestCase):
    def test_capacitive_divider(self):
        """With no series impedance to speak of a floating wire stands at V C12 / C22 (circuit theory)."""
        file = two_wires()
        for part in file["lines"][0]["impedance_ohm_per_m"].values():
            for row in part:
                row[:] = [1e-20 * z for z in row]
        file["lines"][0]["impedance_ohm_per_m"]["re"] = [[1e-20, 0.0], [0.0, 1e-20]]
        file["sources"][0]["impedance_ohm"] = [1e-20, 0.0]
        system, volts = solved(file)
        c = file["lines"][0]["capacitance_F_per_m"]
        expected = -120 * mpf(c[1][0]) / mpf(c[1][1])
        self.assertLess(abs(volts[FLOATING] / expected - 1), 1e-20)
        behind = resolve_network.Ports(system).impedance(FLOATING, 0)
        self.assertLess(abs(behind * mpc(0, OMEGA * mpf(c[1][1]) * LENGTH) - 1), 1e-20)

    def test_dense_elimination_with_many_digits_agrees(self):
        """The nodal equations of the same network, written out by hand and eliminated with 60 digits."""
        file = two_wires()
        _, volts = solved(file)
        with mpmath.workdps(60):
            line = file["lines"][0]
            z = line["impedance_ohm_per_m"]
            series = mpmath.matrix(2, 2)
            for i in range(2):
                for j in range(2):
                    series[i, j] = mpc(z["re"][i][j], z["im"][i][j]) * LENGTH
            series = series**-1
            y = mpmath.matrix(4, 4)  # rows: hot@P, hot@J, f@P, f@J
            for i in range(2):
                for j in range(2):
                    half = mpc(0, OMEGA * mpf(line["capacitance_F_per_m"][i][j]) * LENGTH / 2)
                    for a in range(2):
                        for b in range(2):
                            y[2 * i + a, 2 * j + b] += series[i, j] if a == b else -series[i, j]
                        y[2 * i + a, 2 * j + a] += half
            source = 1 / mpf(1e-9)
            y[0, 0] += source
            expected = mpmath.lu_solve(y, mpmath.matrix([120 * source, 0, 0, 0]))
            for node in range(4):
                self.assertLess(abs(volts[node + 1] / expected[node] - 1), 1e-30)

    def test_cells_approach_the_long_line(self):
        """Twice the cells change the floating voltage by some quarter as much: pi sections are of second order."""
        volts = [solved(two_wires(cells))[1][FLOATING] for cells in (1, 2, 4)]
        ratio = abs(volts[2] - volts[1]) / abs(volts[1] - volts[0])
        self.assertGreater(ratio, 0.24)
        self.assertLess(ratio, 0.26)

    def test_a_loose_node_is_said_to_be_loose(self):
        file = two_wires()
        file["nodes"] += ["x", "y"]
        file["elements"] += [{"what": "alone", "between": [5, 6], "admittance_S": [1.0, 0.0]}]
        system, volts = solved(file)
        self.assertEqual(system.loose, {5})
        self.assertLess(abs(volts[HOT] - 120), 1e-6)

    def run_on(self, network, findings):
        with tempfile.TemporaryDirectory() as folder:
            names = []
            for name, file in (("n.json", network), ("f.json", findings)):
                names.append(str(pathlib.Path(folder) / name))
                pathlib.Path(names[-1]).write_text(json.dumps(file))
            with contextlib.redirect_stdout(io.StringIO()) as said:
                return resolve_network.main(names), said.getvalue()

    def test_right_answers_pass_and_each_wrong_one_is_found(self):
        network = two_wires()
        system, volts = solved(network)
        network["solution_V"] = [[float(v.real), float(v.imag)] for v in volts]
        z = resolve_network.Ports(system).impedance(FLOATING, 0)
        v = volts[FLOATING]
        meter = mpc(1e-7, OMEGA * mpf(100e-12))
        place = {
            "place": "P",
            "open_circuit": {"reference": "earth", "volts": float(abs(v)),
                             "angle_deg": float(mpmath.degrees(mpmath.arg(v)))},
            "source_impedance": {"ohms": float(abs(z)), "angle_deg": float(mpmath.degrees(mpmath.arg(z)))},
            "short_circuit_A": float(abs(v / z)),
            "readings": [{"instrument": "dmm", "reference": "earth", "range_V": None,
                          "volts": float(abs(v / (1 + z * meter)))}],
        }
        findings = {
            "format": "idlewire-findings/1",
            "instruments": [{"name": "dmm", "resistance_ohm": 1e7, "capacitance_F": 100e-12, "ranges": []}],
            "conductors": [{"id": "f", "places": [place]}],
        }
        status, said = self.run_on(network, findings)
        self.assertEqual(status, 0, said)

        def spoil(change):
            n, f = copy.deepcopy(network), copy.deepcopy(findings)
            change(n, f["conductors"][0]["places"][0])
            return self.run_on(n, f)

        slip = 1 + 1e-8
        planted = {
            "node voltage": lambda n, p: n["solution_V"].__setitem__(4, [n["solution_V"][4][0] * slip, 0.0]),
            "open-circuit phasor": lambda n, p: p["open_circuit"].update(volts=p["open_circuit"]["volts"] * slip),
            "source impedance": lambda n, p: p["source_impedance"].update(angle_deg=-89.0),
            "short-circuit current": lambda n, p: p.update(short_circuit_A=p["short_circuit_A"] * slip),
            "reading": lambda n, p: p["readings"][0].update(volts=p["readings"][0]["volts"] * slip),
        }
        for kind, change in planted.items():
            status, said = spoil(change)
            self.assertEqual(status, 1, kind)
            self.assertRegex(said, f"WRONG .*: {kind} ")


if __name__ == "__main__":
    unittest.main()
