"""The report in a real browser: what it does with a script, without one, on paper, and what it never does."""

import base64
import pathlib
import re
import subprocess
import tempfile
import unittest

import tree
from browser import Browser, page_of
from selenium.webdriver.common.by import By
from selenium.webdriver.common.keys import Keys

EXAMPLES = tree.TOP / "examples"
SIZES = {"V": 1, "mV": 1e-3, "kV": 1e3}

EVIL = "<img src=x onerror=hurt=1><script>hurt=2</script>"  # a name holds no full stop
EVIL_MODEL = f"""
format: idlewire/1
title: "{EVIL}"
supplies: {{T1: {{system: 120/240}}}}
panels: {{LP1: {{supply: T1}}}}
runs:
  "C1 {EVIL}": {{from: LP1, to: "Store {EVIL}", length: 32 m, raceway: PVC 40 3/4}}
circuits:
  "LP1-1":
    panel: LP1
    slot: 1
    wires: {{hot: THHN 12, neutral: THHN 12}}
    runs: ["C1 {EVIL}"]
  "spare {EVIL}":
    wires: {{"a'><script>hurt=3</script>": THHN 12}}
    runs: ["C1 {EVIL}"]
"""


def volts(text):
    if text == "<0.01 V":
        return 0.0
    value, unit = text.split()[-2:]
    return float(value) * SIZES[unit]


class ReportInABrowser(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.folder = tempfile.TemporaryDirectory(prefix="idlewire-")
        cls.addClassCleanup(cls.folder.cleanup)
        cls.page = page_of(EXAMPLES / "05-office-floor" / "model.yaml", cls.folder.name)
        cls.browser = Browser()
        cls.addClassCleanup(cls.browser.close)
        cls.driver = cls.browser.driver

    def setUp(self):
        self.browser.screen(1200, 900)
        self.browser.prefers_dark(False)
        self.browser.open(self.page)

    def column(self, name):
        """Texts of a column of the ranked list, of the rows that show."""
        return self.browser.run("""
            const table = document.getElementById("ranked");
            const at = [...table.tHead.rows[0].cells].findIndex(cell => cell.textContent === arguments[0]);
            return [...table.tBodies[0].rows].filter(row => !row.hidden).map(row => row.cells[at].textContent);""", name)

    def press(self, head):
        self.driver.find_element(By.XPATH, f"//table[@id='ranked']//th/button[text()='{head}']").click()

    def test_nothing_is_said_on_the_console_and_nothing_asked_for(self):
        self.browser.drain()
        self.browser.open(self.page)
        self.press("dmm")
        said, asked = self.browser.drain()
        self.assertEqual(said, [])
        self.assertEqual([url for url in asked if url != pathlib.Path(self.page).as_uri()], [])
        self.assertTrue(asked)  # the page itself was seen to be asked for

    def test_the_policy_stops_what_is_not_the_pages_own(self):
        added = self.browser.run("""
            const script = document.createElement("script");
            script.textContent = "window.foreign = 1";
            document.body.append(script);
            return window.foreign === undefined;""")
        self.assertTrue(added)
        said, _ = self.browser.drain()
        self.assertTrue(any("Content Security Policy" in line for line in said))

    def test_it_sorts_by_figures_and_by_words(self):
        before = self.column("dmm")
        self.assertGreater(len(before), 15)
        self.press("dmm")
        rising = [volts(text) for text in self.column("dmm")]
        self.assertEqual(rising, sorted(rising))
        self.press("dmm")
        falling = [volts(text) for text in self.column("dmm")]
        self.assertEqual(falling, sorted(rising, reverse=True))
        self.assertCountEqual(self.column("dmm"), before)
        self.press("conductor")
        names = self.column("conductor")
        self.assertEqual(names[0], "LP2-4.switched")  # 4 before 14
        sorted_heads = self.driver.find_elements(By.CSS_SELECTOR, "#ranked th[aria-sort]")
        self.assertEqual([head.text.split()[0] for head in sorted_heads], ["conductor"])

    def test_it_sorts_by_size_across_units(self):
        self.press("source impedance")
        sizes = {"Mohm": 1e6, "kohm": 1e3, "ohm": 1, "mohm": 1e-3}
        ohms = [float(text.split()[0]) * sizes[text.split()[1]] for text in self.column("source impedance")]
        self.assertEqual(ohms, sorted(ohms))

    def test_it_searches_and_filters(self):
        everything = self.column("conductor")
        field = self.driver.find_element(By.NAME, "q")
        field.send_keys("spare H6")
        self.assertEqual(self.column("conductor"), ["spare-H6.a", "spare-H6.b"])
        self.assertEqual(self.driver.find_element(By.ID, "count").text, f"2 of {len(everything)} shown")
        self.driver.find_element(By.CSS_SELECTOR, "#find button[type=reset]").click()
        self.browser.run("return new Promise(done => setTimeout(done))")
        self.assertEqual(self.column("conductor"), everything)
        self.driver.find_element(By.NAME, "verdict").send_keys("false_live")
        self.assertEqual(self.column("conductor"), ["old-bell.a", "old-bell.b", "old-floor.neutral"])
        self.driver.find_element(By.NAME, "place").send_keys("Room 205")
        self.assertEqual(self.column("conductor"), [])

    def test_a_link_leads_to_the_sheet_by_keyboard(self):
        link = self.driver.find_element(By.LINK_TEXT, "old-bell.b")
        link.send_keys(Keys.ENTER)
        target = self.browser.run("return document.querySelector(':target').id")
        self.assertEqual(self.driver.find_element(By.CSS_SELECTOR, f"#{target} h3").text, "old-bell.b")
        top = self.browser.run("return document.querySelector(':target').getBoundingClientRect().top")
        self.assertTrue(0 <= top < 900, top)

    def test_the_skip_link_is_the_first_stop(self):
        self.driver.find_element(By.TAG_NAME, "body").send_keys(Keys.TAB)
        self.assertEqual(self.driver.switch_to.active_element.text, "Skip to the ranked list")

    def test_it_turns_dark_and_light(self):
        paper = "return getComputedStyle(document.body).backgroundColor"
        light = self.browser.run(paper)
        self.driver.find_element(By.ID, "theme").click()
        dark = self.browser.run(paper)
        self.assertGreater(sum(map(int, re.findall(r"\d+", light))), 600)
        self.assertLess(sum(map(int, re.findall(r"\d+", dark))), 150)
        self.browser.prefers_dark(True)
        self.browser.open(self.page)
        self.assertEqual(self.browser.run(paper), dark)

    def test_the_plan_tells_of_what_has_the_focus(self):
        run = self.driver.find_element(By.CSS_SELECTOR, "#plan a[aria-label^='B62']")
        self.browser.run("arguments[0].focus()", run)
        told = self.driver.find_element(By.ID, "told").text
        self.assertRegex(told, r"B62, 26 m: run B62 from JB-6 to Reception, PVC 40 1/2\. Worst: old-bell\.a, 60 V, false_live\.")

    def test_it_is_whole_without_a_script(self):
        self.browser.command("Emulation.setScriptExecutionDisabled", value=True)
        self.addCleanup(self.browser.command, "Emulation.setScriptExecutionDisabled", value=False)
        self.browser.open(self.page)
        self.assertFalse(self.driver.find_element(By.ID, "find").is_displayed())
        self.assertEqual(self.driver.find_elements(By.ID, "theme"), [])
        rows = self.driver.find_elements(By.CSS_SELECTOR, "#ranked tbody tr")
        sheets = self.driver.find_elements(By.CSS_SELECTOR, "article.sheet")
        self.assertGreater(len(rows), 15)
        self.assertEqual(len(sheets), len(rows))
        self.assertTrue(all(row.is_displayed() for row in rows))

    def test_it_fits_a_phone_and_a_zoom_of_two_hundred_percent(self):
        for width, ratio in ((360, 3), (640, 2)):
            self.browser.screen(width, 800, ratio)
            self.browser.run("document.querySelectorAll('.sheet, .test').forEach(e => e.style.contentVisibility = 'visible')")
            wide, room = self.browser.run("const e = document.documentElement; return [e.scrollWidth, e.clientWidth]")
            self.assertEqual(wide, room)

    def test_it_prints_a_test_sheet_a_page_on_both_papers(self):
        for name, width, height in (("A4", 8.27, 11.69), ("Letter", 8.5, 11.0)):
            printed = self.browser.command("Page.printToPDF", paperWidth=width, paperHeight=height, preferCSSPageSize=False)
            path = pathlib.Path(self.folder.name) / f"{name}.pdf"
            path.write_bytes(base64.b64decode(printed["data"]))
            text = subprocess.run(["pdftotext", "-layout", str(path), "-"], capture_output=True, text=True, check=True).stdout
            pages = [page for page in text.split("\f") if "Test sheet: " in page]
            places = re.findall(r"Test sheet: (.*)", text)
            self.assertGreater(len(places), 20)
            self.assertEqual(len(pages), len(places), name)  # no two on one page
            for page in pages:
                self.assertRegex(page.lstrip(), "^Test sheet: ")
                self.assertIn("proves nothing", page)
                self.assertIn("Stage: As found", page)
            self.assertNotIn("Dark page", text)

    def test_nothing_of_a_model_runs(self):
        model = pathlib.Path(self.folder.name) / "evil.yaml"
        model.write_text(EVIL_MODEL, encoding="utf-8")
        page = page_of(model, self.folder.name)
        self.browser.open(page)
        self.assertIsNone(self.browser.run("return window.hurt ?? null"))
        self.assertEqual(self.browser.run("return document.querySelectorAll('img').length"), 0)
        self.assertEqual(self.browser.run("return document.scripts.length"), 1)
        self.assertIn(EVIL, self.driver.find_element(By.TAG_NAME, "h1").text)
        self.assertEqual(self.browser.drain()[0], [])


if __name__ == "__main__":
    unittest.main()
