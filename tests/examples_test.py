"""Each shipped example gives the answer that its README and the practice of the trade expect.

The program is named by the environment variable IDLEWIRE.
"""

import functools
import json
import os
import pathlib
import subprocess
import unittest

import tree

PROGRAM = os.environ["IDLEWIRE"]


@functools.cache
def predict(model, stage=None):
    """The findings of examples/MODEL, with its ids as keys of `by_id`."""
    command = [PROGRAM, "predict", str(tree.TOP / "examples" / model), "--quiet", "--json", "-"]
    run = subprocess.run(command + (["--stage", stage] if stage else []), capture_output=True, text=True)
    if run.returncode:
        raise AssertionError(f"{' '.join(command)} ended with {run.returncode}:\n{run.stderr}")
    findings = json.loads(run.stdout)
    findings["by_id"] = {c["id"]: c for c in findings["conductors"]}
    return findings


def place(findings, conductor, where):
    return next(p for p in findings["by_id"][conductor]["places"] if p["place"] == where)


def volts(findings, conductor, where, instrument="dmm", reference="ground"):
    """The reading of the instrument there."""
    found = [r["volts"] for r in place(findings, conductor, where)["readings"]
             if r["instrument"] == instrument and r["reference"] == reference]
    if len(found) != 1:
        raise AssertionError(f"{conductor} at {where}: {len(found)} readings of {instrument} to {reference}")
    return found[0]


class OneCircuit(unittest.TestCase):
    def test_a_spare_in_bonded_tubing_reads_under_a_fifth_of_line_voltage(self):
        self.assertLess(volts(predict("01-one-circuit/emt.yaml"), "spare-1.a", "Store room"), 120 / 5)

    def test_the_same_wires_in_plastic_read_far_more(self):
        metal = volts(predict("01-one-circuit/emt.yaml"), "spare-1.a", "Store room")
        plastic = volts(predict("01-one-circuit/pvc.yaml"), "spare-1.a", "Store room")
        self.assertGreater(plastic, 1.5 * metal)

    def test_a_low_impedance_makes_it_vanish(self):
        for model in ("emt", "pvc"):
            findings = predict(f"01-one-circuit/{model}.yaml")
            self.assertEqual(findings["by_id"]["spare-1.a"]["condition"], "floating")
            self.assertLess(volts(findings, "spare-1.a", "Store room", "low_impedance"), 0.5)


class SwitchedLeg(unittest.TestCase):
    def test_an_idle_traveller_reads_as_practice_has_it(self):
        """16 to 70 V on 120 V for a traveller or switched wire in a 3-conductor cable: common practice."""
        findings = predict("02-switched-leg/model.yaml")
        self.assertEqual(findings["by_id"]["stairs.t2"]["condition"], "floating")
        reading = volts(findings, "stairs.t2", "Stair head")
        self.assertGreater(reading, 16)
        self.assertLess(reading, 70)

    def test_the_lit_way_is_energised_and_the_idle_one_is_not(self):
        lit = predict("02-switched-leg/model.yaml")["by_id"]
        self.assertEqual(lit["stairs.t1"]["condition"], "energised")
        self.assertEqual(lit["stair-light.switched"]["condition"], "energised")
        off = predict("02-switched-leg/model.yaml", "Stair light off")["by_id"]
        self.assertEqual(off["stairs.t1"]["condition"], "energised")
        self.assertEqual(off["stairs.t2"]["condition"], "grounded_through_load")
        self.assertEqual(off["stair-light.switched"]["condition"], "grounded_through_load")

    def test_a_lamp_in_its_socket_pulls_the_switched_wire_down(self):
        off = predict("02-switched-leg/model.yaml", "Stair light off")
        self.assertLess(volts(off, "stair-light.switched", "Stair light"), 3)

    def test_a_switched_wire_without_its_lamp_floats(self):
        findings = predict("02-switched-leg/model.yaml")
        self.assertEqual(findings["by_id"]["porch-loop.switched"]["condition"], "floating")
        self.assertLess(volts(findings, "porch-loop.switched", "Porch switch", "low_impedance"), 3)

    def test_the_bare_ground_between_two_wires_takes_the_field_away(self):
        """In the 3-conductor cable the traveller lies next to the live one, in the other the ground lies between."""
        findings = predict("02-switched-leg/model.yaml")
        beside = place(findings, "stairs.t2", "Stair head")["open_circuit"]["volts"]
        behind = place(findings, "porch-loop.switched", "Porch switch")["open_circuit"]["volts"]
        self.assertLess(behind, beside / 2)
        self.assertGreater(behind, 5)


class IsolatedSupply(unittest.TestCase):
    def test_each_leg_reads_about_half_on_high_impedance_and_nothing_on_low(self):
        """Half to ground, under 0.5 V in a low-impedance mode: common practice."""
        findings = predict("03-isolated-supply/equal.yaml")
        for leg in ("IP1-1.line1", "IP1-1.line2"):
            self.assertAlmostEqual(volts(findings, leg, "Bench"), 60, delta=6)
            self.assertLess(volts(findings, leg, "Bench", "low_impedance"), 0.5)

    def test_leg_to_leg_reads_full_voltage_on_both(self):
        for model in ("equal", "unequal"):
            findings = predict(f"03-isolated-supply/{model}.yaml")
            for instrument in ("dmm", "low_impedance"):
                across = volts(findings, "IP1-1.line1", "Bench", instrument, "IP1-1.line2")
                self.assertAlmostEqual(across, 120, delta=3)

    def test_both_legs_rank_first_as_false_dead(self):
        for model in ("equal", "unequal"):
            by_id = predict(f"03-isolated-supply/{model}.yaml")["by_id"]
            legs = [by_id["IP1-1.line1"], by_id["IP1-1.line2"]]
            self.assertEqual({leg["condition"] for leg in legs}, {"energised"})
            self.assertEqual({leg["misleads"]["how"] for leg in legs}, {"false_dead"})
            self.assertEqual({leg["rank"] for leg in legs}, {1, 2})

    def test_unequal_strays_do_not_read_half(self):
        findings = predict("03-isolated-supply/unequal.yaml")
        readings = sorted(volts(findings, leg, "Bench") for leg in ("IP1-1.line1", "IP1-1.line2"))
        self.assertLess(readings[0], 40)
        self.assertGreater(readings[1], 80)

    def test_the_normal_circuit_beside_it_is_not_flagged(self):
        by_id = predict("03-isolated-supply/equal.yaml")["by_id"]
        self.assertEqual(by_id["LP2-7.hot"]["misleads"]["how"], "no")


class OpenNeutral(unittest.TestCase):
    MODEL = "04-open-neutral/model.yaml"

    def test_behind_900_w_every_instrument_reads_full_voltage(self):
        findings = predict(self.MODEL)
        neutral = findings["by_id"]["LP1-1.neutral/C2"]
        self.assertEqual(neutral["condition"], "through_load")
        self.assertEqual(neutral["misleads"]["how"], "no")
        readings = [r for r in place(findings, "LP1-1.neutral/C2", "Hot plate")["readings"]
                    if r["reference"] == "ground"]
        self.assertGreaterEqual({r["instrument"] for r in readings}, {"dmm", "low_impedance", "analog_5k"})
        for reading in readings:
            self.assertGreater(reading["volts"], 118, reading["instrument"])

    def test_its_twins_read_the_divider_of_load_and_instrument(self):
        """120 V behind R read by 3 kohm: 120 * 3 / (3 + R), 14.4 V and 2.35 V (Ohm's law)."""
        findings = predict(self.MODEL)
        for conductor, where, ohms in (("LP1-3.neutral/C4", "Door relay", 22e3), ("LP1-5.neutral/C6", "Sign", 150e3)):
            self.assertEqual(findings["by_id"][conductor]["condition"], "through_load")
            expected = 120 * 3e3 / (3e3 + ohms)
            # Coupling and the drop of the line add less than 1 %.
            self.assertAlmostEqual(volts(findings, conductor, where, "low_impedance"), expected, delta=0.01 * expected)
            self.assertGreater(volts(findings, conductor, where), 115)

    def test_behind_150_kohm_it_is_false_dead(self):
        self.assertEqual(predict(self.MODEL)["by_id"]["LP1-5.neutral/C6"]["misleads"]["how"], "false_dead")

    def test_a_shared_neutral_stands_where_its_loads_put_it(self):
        """Two loads in series across 240 V: |120/R1 - 120/R2| / (1/R1 + 1/R2), R = V^2 / P (circuit theory)."""
        findings = predict(self.MODEL)
        g1, g2 = 1200 / 120**2, 100 / 120**2
        expected = 120 * (g1 - g2) / (g1 + g2)
        self.assertEqual(findings["by_id"]["LP1-6.neutral/C8"]["condition"], "through_load")
        for instrument in ("dmm", "low_impedance"):
            # The 3 kohm sits behind some 11 ohm, and the lines drop a little.
            reading = volts(findings, "LP1-6.neutral/C8", "Counter", instrument)
            self.assertAlmostEqual(reading, expected, delta=0.01 * expected)


class OfficeFloor(unittest.TestCase):
    MODEL = "05-office-floor/model.yaml"

    def test_it_is_a_floor(self):
        findings = predict(self.MODEL)
        circuits = {c["id"].split(".")[0] for c in findings["conductors"]}
        self.assertGreaterEqual(len([c for c in circuits if c.startswith(("LP2-", "RP2-"))]), 40)
        self.assertEqual([w for w in findings["warnings"] if "fill" in w], [])

    def test_the_result_shown_in_the_readme_is_what_is_printed(self):
        run = subprocess.run([PROGRAM, "predict", str(tree.TOP / "examples" / self.MODEL), "--quiet"],
                             capture_output=True, text=True, check=True)
        readme = (tree.TOP / "README.md").read_text(encoding="utf-8")
        result = readme.split("## A result")[1].split("\n## ")[0]
        shown = [line[4:] for line in result.splitlines() if line.startswith("    ")]
        # The line of stage, model hash and date changes by itself.
        shown = [line for line in shown if not line.startswith("Stage:")]
        printed = [line for line in run.stdout.splitlines() if line and not line.startswith("Stage:")]
        self.assertGreater(len(shown), 10)
        self.assertEqual(shown, printed[: len(shown)])

    def test_what_nothing_feeds_floats_and_only_that_misleads(self):
        findings = predict(self.MODEL)
        for conductor in ("old-H2.hot", "old-floor.ig", "spare-H1.a", "spare-H6.b", "LP2-5.hot", "RP2-10.hot"):
            self.assertEqual(findings["by_id"][conductor]["condition"], "floating", conductor)
        for conductor in ("old-bell.a", "old-bell.b"):  # one live wire, in plastic
            self.assertEqual(findings["by_id"][conductor]["misleads"]["how"], "false_live", conductor)
        for conductor in findings["conductors"]:
            self.assertNotEqual(conductor["misleads"]["how"], "false_dead", conductor["id"])
            if conductor["misleads"]["how"] == "false_live":
                self.assertIn(conductor["condition"], ("floating", "grounded_through_load"), conductor["id"])

    def test_two_phases_less_read_more(self):
        """Three phases around a wire nearly cancel; one alone does not (the phasor mean of the neighbours)."""
        where = "West floor boxes"
        found = volts(predict(self.MODEL), "old-floor.hot", where)
        left = volts(predict(self.MODEL, "West bay, lines B and C locked off"), "old-floor.hot", where)
        self.assertGreater(left, 1.3 * found)

    def test_ranks_run_without_gaps_and_by_kind(self):
        ranked = [c for c in predict(self.MODEL)["conductors"] if c["rank"] is not None]
        self.assertEqual([c["rank"] for c in ranked], list(range(1, len(ranked) + 1)))
        kinds = [c["misleads"]["how"] for c in ranked]
        self.assertEqual(kinds, sorted(kinds))  # false_dead before false_live


class PlantControl(unittest.TestCase):
    MODEL = "06-plant-control/model.yaml"

    def test_a_weak_low_impedance_does_not_pull_a_long_cable_down(self):
        """Some 420 m at 100 pF/m and more: under 100 kohm at 50 Hz, so 300 kohm hardly loads it."""
        findings = predict(self.MODEL)
        for core in ("CC-101.spare5", "CC-101.spare6"):
            self.assertEqual(findings["by_id"][core]["condition"], "floating")
            meter = volts(findings, core, "River intake")
            self.assertGreater(meter, 16)
            self.assertGreater(volts(findings, core, "River intake", "low_impedance_weak"), 0.9 * meter)

    def test_what_the_cable_drives_is_felt(self):
        """230 V through some 100 pF/m drives over 0.5 mA from 70 m on (IEC 60479-1, threshold of perception)."""
        findings = predict(self.MODEL)
        self.assertGreater(place(findings, "CC-101.spare5", "River intake")["short_circuit_A"], 0.5e-3)

    def test_the_open_flow_switch_holds_a_voltage_on_its_input(self):
        findings = predict(self.MODEL)
        self.assertEqual(findings["by_id"]["CC-101.flow"]["condition"], "grounded_through_load")
        self.assertGreater(volts(findings, "CC-101.flow", "MCC1"), 10)

    def test_with_the_pump_stopped_one_live_core_less_is_seen(self):
        runs = volts(predict(self.MODEL), "CC-101.spare5", "River intake")
        stopped = volts(predict(self.MODEL, "Pump stopped"), "CC-101.spare5", "River intake")
        self.assertLess(stopped, runs)


if __name__ == "__main__":
    unittest.main()
