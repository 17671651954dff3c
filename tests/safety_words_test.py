"""No text of the program says what could get somebody hurt.

Scans the sources that speak to people, the catalogue, every README and example, and what the built
program (named by the environment variable IDLEWIRE) prints. A rule forbids a pattern in a sentence
unless the same sentence holds the rule's excuse.
"""

import json
import os
import re
import subprocess
import unittest

import tree

FOLDERS = ("io", "netlists", "examples")
KINDS = (".cpp", ".h", ".in", ".yaml", ".yml", ".md", ".txt", ".svg", ".css", ".js")
OBJECT = r"(it|them|this|that|each|every|both|all|any|the (conductor|wire|spare|leg|core|line|hot|other)s?)\b"
INSULATION_TEST = r"once proved dead, isolated at both ends and with equipment disconnected"
DENIED = r"\b(no|not|never|nothing|none|nobody|nor|cannot)\b"

# name, what is forbidden, what excuses it within the sentence
RULES = [
    ("belittles a coupled voltage", r"\b(cannot|can't|can not|never|won't|will not|does not|doesn't)\b.{0,30}"
     r"\b(shock|hurt|harm|kill|injure)|\bharmless\b|\bnot (dangerous|hazardous)\b|\bno (danger|hazard|risk)\b"
     r"|\b(just|only|merely) an? (phantom|ghost)\b|\bnothing to worry\b", None),
    ("calls something safe", r"\bsafe(ly)?\b(?! ?-?guard)", DENIED),
    ("calls something dead", r"\b(is|are|be|becomes?|stays?|remains?|must be|surely) dead\b", DENIED),
    ("proves something dead", r"\bproves? .{0,40}\bdead\b", DENIED),
    ("does without a test", r"\ball.clear\b|\b(need not|no need to|do not need to|don't need to) (test|prove|check)\b"
     r"|\bwithout (testing|proving)\b", None),
    ("grounds a conductor", r"(?<!to )(?<!from )(?<!between )(?<!and )\b(ground|earth) " + OBJECT + r"(?! is\b)"
     r"|\b(connect|tie|touch|strap|jumper|clip|bond|wire|hold) (it|them|the|a|an|each|every|both|all|this|that|any)\b"
     r".{0,60}\b(to|against|with) (the )?(ground|earth|neutral|box|metal)\b", r"proved dead|" + DENIED),
    ("shorts a conductor", r"\b(short|short-circuit) " + OBJECT + r"|\bjumper across\b"
     r"|\bmeasur\w+ .{0,30}short.circuit current\b", r"proved dead|" + DENIED),
    ("connects an ammeter", r"\b(milli|micro)?am(me|pereme)ter\b|\bclamp.?(on )?meter\b|\bcurrent clamp\b",
     r"proved dead|" + DENIED),
    ("tests insulation", r"\binsulation.(resistance.)?test(?!er\b)", INSULATION_TEST),
    ("shows a tick", r"[\u2713\u2714\u2705\u2611\U0001F7E2\U0001F44D\U0001F44C]|&check;|\\u27(13|14|05)"
     r"|\\xe2\\x9c\\x(93|94|85)", None),
    ("lights a green", r"(\\(x1b|033|e)|\x1b)\[([0-9]*;)*(32|42|92|102)[;m]"
     r"|\"([014];)?(32|42|92|102)\"|color::\w*(green|lime)"
     r"|\b(fill|stroke|colou?r|background)\W{1,4}(\w*green|lime|#0[0-9a-f]0\b|#00[0-9a-f]{2}00\b)"
     r"|\bgreen (means|stands|says|for|when|if)\b", None),
]


def sentences(text):
    """The sentences of a source file or a page, comment marks and line breaks taken out."""
    text = re.sub(r'"\s*\n\s*"', "", text)  # a literal that runs on
    text = re.sub(r"^[ \t]*(///?|#|>|\*)[ \t]?", "", text, flags=re.M)
    text = re.sub(r"\n\s*([-*|]|\d+\.) ", "\n\n", text)  # items of a list
    for block in re.split(r"\n\s*\n", text):
        block = " ".join(block.split())
        yield from re.split(r'(?<=[.;!?])["\')]*\s+', block)


def slips(text):
    """(rule, sentence) for all that is forbidden in the text."""
    found = []
    for sentence in sentences(text):
        for name, forbidden, excuse in RULES:
            if re.search(forbidden, sentence, re.I) and not (excuse and re.search(excuse, sentence, re.I)):
                found.append((name, sentence))
    return found


def files():
    found = [p for folder in FOLDERS for p in (tree.TOP / folder).rglob("*")]
    found += list(tree.TOP.glob("*.md")) + list((tree.TOP / "engine").glob("*.md"))
    return sorted(p for p in found if p.is_file() and (p.suffix in KINDS))


def output(*arguments):
    run = subprocess.run([os.environ["IDLEWIRE"], *arguments], capture_output=True, text=True)
    if run.returncode:
        raise AssertionError(f"idlewire {' '.join(arguments)} ended with {run.returncode}:\n{run.stderr}")
    return run.stdout + run.stderr


class SafetyWords(unittest.TestCase):
    def test_no_text_of_the_program_slips(self):
        scanned = files()
        self.assertGreater(len(scanned), 60)  # a search that finds nothing would pass
        self.assertTrue(any(p.name == "cables.yaml" for p in scanned), "the catalogue was not scanned")
        for path in scanned:
            for name, sentence in slips(path.read_text(encoding="utf-8")):
                self.fail(f"{path.relative_to(tree.TOP)} {name}: {sentence}")

    def test_no_output_slips(self):
        model = str(tree.TOP / "examples" / "03-isolated-supply" / "equal.yaml")
        texts = {"help": output("--help"), "catalogue": output("catalogue"), "check": output("check", model)}
        for path in sorted((tree.TOP / "examples").glob("*/*.yaml")):
            if path.parent.name.startswith("05-"):
                continue  # as many words as the others, ten times as long
            texts[path.name] = output("predict", str(path))
            page = output("predict", str(path), "--quiet", "--html", "-")
            texts[path.name + ", the page"] = re.sub(r"<(style|script)>.*?</\1>|<[^>]*>", " ", page, flags=re.S)
            ranked = json.loads(output("predict", str(path), "--quiet", "--json", "-"))["conductors"]
            for conductor in ranked[:2] + ranked[-2:]:
                texts[conductor["id"]] = output("explain", str(path), conductor["id"])
        for name, text in texts.items():
            self.assertFalse(slips(text), name)

    def test_each_rule_finds_what_it_is_for(self):
        planted = {
            "belittles a coupled voltage": ["A phantom cannot shock.", "Such a voltage is harmless.",
                                            "It will never hurt anybody.", "This is just a phantom."],
            "calls something safe": ["It is safe to touch.", "The spare can safely be cut."],
            "calls something dead": ["The conductor is dead.", "Below 3 V they are dead."],
            "proves something dead": ["A reading of 0 V proves the conductor dead."],
            "does without a test": ["Below the limit: all clear.", "There is no need to test it."],
            "grounds a conductor": ["Ground the spare.", "If it reads 60 V, ground it and read again.",
                                    "Connect the conductor to ground.", "Touch it to the box."],
            "shorts a conductor": ["Short it and see.", "Then short the conductor to neutral.",
                                   "Measure the short-circuit current."],
            "connects an ammeter": ["Put an ammeter on the spare.", "Read it with a milliammeter."],
            "tests insulation": ["Make an insulation test.", "An insulation resistance test settles it."],
            "shows a tick": ["\u2713 spare-1.a", "<td>&check;</td>"],
            "lights a green": ['out += "\\x1b[32mok";', "\x1b[1;32mspare-1.a", 'style("1;32")', 'fill="green"',
                               "Green means that nothing misleads."],
        }
        self.assertEqual(set(planted), {name for name, _, _ in RULES})
        for name, texts in planted.items():
            for text in texts:
                self.assertIn(name, [found for found, _ in slips(text)], text)

    def test_a_slip_is_found_in_the_ways_text_is_broken(self):
        for text in ('  say("the conductor is "\n      "dead");', "// The conductor\n// is dead.",
                     "- one\n- the conductor is\n  dead\n", "> The conductor is\n> dead."):
            self.assertIn("calls something dead", [found for found, _ in slips(text)], text)

    def test_what_must_be_said_can_be_said(self):
        for text in ("Treat every conductor as live until proved dead with a proper, proven instrument.",
                     "A reading below it never proves the conductor dead.",
                     "No colour, tick or word stands for safe or dead.",
                     "Once proved dead, ground the spare.", "Never connect an ammeter to it.",
                     "While one leg is loaded to ground the other is at full voltage to ground.",
                     "An insulation test, once proved dead, isolated at both ends and with equipment disconnected.",
                     "short-circuit current (computed)", "the ground bar is earth", "a green insulated wire",
                     "false_dead", "dead_like"):
            self.assertEqual(slips(text), [], text)


if __name__ == "__main__":
    unittest.main()
