"""What a person sees on a terminal, and what a pipe gets: colour, width and the bar of slow work."""

import fcntl
import os
import pty
import re
import struct
import subprocess
import tempfile
import termios
import unittest

import tree

CODES = re.compile(r"\x1b\[[0-9;]*[mK]")


def on_terminal(arguments, columns=80, **environment):
    """(output, messages) of the program with a terminal of its own on both."""
    texts = []
    for which in ("stdout", "stderr"):
        ours, theirs = pty.openpty()
        fcntl.ioctl(theirs, termios.TIOCSWINSZ, struct.pack("HHHH", 40, columns, 0, 0))
        streams = {"stdout": subprocess.DEVNULL, "stderr": subprocess.DEVNULL, which: theirs}
        with subprocess.Popen([os.environ["IDLEWIRE"], *arguments], stdin=subprocess.DEVNULL,
                              env={**os.environ, "TERM": "xterm", **environment}, **streams) as run:
            os.close(theirs)
            text = b""
            while True:
                try:
                    part = os.read(ours, 65536)
                except OSError:  # the other side is closed
                    break
                if not part:
                    break
                text += part
        os.close(ours)
        texts.append(text.decode().replace("\r\n", "\n"))
        if run.returncode:
            raise AssertionError(f"ended with {run.returncode}: {texts}")
    return texts


def slow_model():
    """Raceways that all hold different wires, so that each has to be solved: some seconds."""
    lines = ["format: idlewire/1", "supplies: {T1: {system: 120/240}}", "panels: {LP1: {supply: T1}}", "runs:"]
    lines += [f"  C{k}: {{from: LP1, to: Box {k}, length: 40 m, raceway: PVC 40 2}}" for k in range(8)]
    lines += ["circuits:"]
    for k in range(8):
        wires = ", ".join(f"w{j}: THHN {(14, 12, 10)[(k // 3 ** (j % 2)) % 3]}" for j in range(12))
        lines += [f"  S{k}: {{wires: {{{wires}}}, runs: [C{k}]}}"]
    return "\n".join(lines) + "\n"


class Terminal(unittest.TestCase):
    quick = str(tree.TOP / "examples" / "03-isolated-supply" / "equal.yaml")

    def test_colour_is_for_terminals_and_can_be_refused(self):
        shown, _ = on_terminal(["predict", self.quick])
        self.assertIn("\x1b[1;31mFALSE_DEAD", shown)
        plain, _ = on_terminal(["predict", self.quick], NO_COLOR="1")
        self.assertNotIn("\x1b", plain)
        self.assertEqual(CODES.sub("", shown), plain)
        piped = subprocess.run([os.environ["IDLEWIRE"], "predict", self.quick], capture_output=True, text=True)
        self.assertNotIn("\x1b", piped.stdout + piped.stderr)

    def test_the_width_is_kept(self):
        for columns in (64, 80, 100):
            shown, _ = on_terminal(["predict", self.quick], columns=columns)
            self.assertLessEqual(max(len(CODES.sub("", line)) for line in shown.splitlines()), columns)

    def test_slow_work_shows_a_bar_on_terminals_only(self):
        with tempfile.TemporaryDirectory() as folder:
            model = os.path.join(folder, "model.yaml")
            with open(model, "w", encoding="utf-8") as file:
                file.write(slow_model())
            _, messages = on_terminal(["predict", model])
            self.assertRegex(messages, r"\[#*\.*\]  cross-sections, \d+ of 8, about \d+ (s|min) left")
            self.assertTrue(messages.rstrip("\n").endswith("\r\x1b[K"), "the bar's line is not given back")
            _, quiet = on_terminal(["predict", model, "--quiet"])
            self.assertEqual(quiet, "")
            piped = subprocess.run([os.environ["IDLEWIRE"], "predict", model], capture_output=True, text=True)
            self.assertNotIn("cross-sections, ", piped.stderr)

    def test_quick_work_shows_none(self):
        _, messages = on_terminal(["predict", self.quick])
        self.assertNotIn("[", messages)


if __name__ == "__main__":
    unittest.main()
