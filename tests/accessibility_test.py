"""axe-core finds nothing on the report that would keep people from using it: light, dark, on a phone.

It comes from the npm registry through .ci/setup. Without it the test is skipped (status 77) and says so.
"""

import sys
import tempfile
import unittest

import tree
from browser import Browser, page_of

AXE = tree.TOP / ".cache" / "axe-core" / "axe.min.js"


class Accessibility(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.folder = tempfile.TemporaryDirectory(prefix="idlewire-")
        cls.addClassCleanup(cls.folder.cleanup)
        cls.browser = Browser()
        cls.addClassCleanup(cls.browser.close)
        cls.axe = AXE.read_text(encoding="utf-8")

    def violations(self):
        self.browser.driver.set_script_timeout(120)
        self.browser.run("document.querySelectorAll('.sheet, .test').forEach(e => e.style.contentVisibility = 'visible')")
        self.browser.run(self.axe)
        result = self.browser.driver.execute_async_script(
            "const done = arguments[0]; axe.run(document, {resultTypes: ['violations']}).then(done)")
        self.assertGreater(len(result["passes"]), 20)
        return [f"{one['id']}: {one['help']}: {one['nodes'][0]['html'][:200]}" for one in result["violations"]]

    def test_no_violation(self):
        for name in ("03-isolated-supply/equal", "04-open-neutral/model", "06-plant-control/model"):
            page = page_of(tree.TOP / "examples" / f"{name}.yaml", self.folder.name)
            for dark, width in ((False, 1200), (True, 1200), (False, 360)):
                with self.subTest(model=name, dark=dark, width=width):
                    self.browser.screen(width, 900)
                    self.browser.prefers_dark(dark)
                    self.browser.open(page)
                    self.assertEqual(self.violations(), [])

    def test_a_planted_violation_is_found(self):
        self.browser.open(page_of(tree.TOP / "examples" / "03-isolated-supply" / "equal.yaml", self.folder.name))
        self.browser.run("document.querySelector('main').append(document.createElement('select'))")
        self.assertTrue(any(one.startswith("select-name") for one in self.violations()))


if __name__ == "__main__":
    if not AXE.is_file():
        print(f"skipped: no axe-core at {AXE.relative_to(tree.TOP)}; .ci/setup fetches it from the npm registry")
        sys.exit(77)
    unittest.main()
