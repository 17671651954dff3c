"""Every format says the same: the figures of --html, --xlsx and --csv are those of --json.

The words for figures are made anew here, so that the page is not held against its own writer.
"""

import csv
import html.parser
import io
import json
import math
import os
import pathlib
import re
import subprocess
import tempfile
import unittest
import xml.etree.ElementTree
import zipfile

import tree

MODELS = ("03-isolated-supply/equal", "04-open-neutral/model", "06-plant-control/model")


def rounded(value, digits=2):
    before = math.floor(math.log10(abs(value))) + 1 if value else 0
    return f"{value:.{max(0, digits - before)}f}"


def volts(value):
    if value < 0.01:
        return "<0.01 V"
    return f"{rounded(value)} V" if value < 9995 else f"{rounded(value / 1e3)} kV"


def in_units(value, units):
    for size, name in units:
        if value >= 0.9995 * size:
            return f"{rounded(value / size)} {name}"
    return f"{rounded(value / units[-1][0])} {units[-1][1]}"


def ohms(value):
    if value == 0:
        return "0 ohm"
    return in_units(value, [(1e9, "Gohm"), (1e6, "Mohm"), (1e3, "kohm"), (1, "ohm"), (1e-3, "mohm")])


class Page(html.parser.HTMLParser):
    """The tables of a page by caption: rows of cell texts, the header first; and ids, links, requests."""

    def __init__(self, text):
        super().__init__(convert_charrefs=True)
        self.tables, self.ids, self.links, self.fetches = {}, [], [], []
        self.rows = self.caption = self.cell = None
        self.feed(text)

    def close_cell(self):
        if self.cell is not None:
            self.rows[-1].append(" ".join("".join(self.cell).split()))
            self.cell = None

    def handle_starttag(self, tag, attributes):
        attributes = dict(attributes)
        if "id" in attributes:
            self.ids.append(attributes["id"])
        if tag == "a":
            self.links.append(attributes["href"])
        self.fetches += [(tag, k) for k in attributes if k in ("src", "srcset", "data", "poster", "action")]
        if tag == "link":
            self.fetches.append((tag, "link"))
        if tag == "table":
            self.rows, self.caption = [], []
        elif tag == "tr":
            self.close_cell()
            self.rows.append([])
        elif tag in ("td", "th"):
            self.close_cell()
            self.cell = []
        elif tag == "tbody":
            self.close_cell()

    def handle_endtag(self, tag):
        if tag == "caption":
            self.caption = "".join(self.caption)
        elif tag == "table":
            self.close_cell()
            self.tables.setdefault(self.caption, []).append(self.rows)
            self.rows = self.caption = None

    def handle_data(self, data):
        if self.cell is not None:
            self.cell.append(data)
        elif isinstance(self.caption, list):
            self.caption.append(data)


class Workbook:
    """The sheets of an XLSX file by name, each a list of rows of texts and numbers; and whether it computes."""

    SPACE = "{http://schemas.openxmlformats.org/spreadsheetml/2006/main}"

    def __init__(self, path):
        with zipfile.ZipFile(path) as file:
            parts = {name: file.read(name) for name in file.namelist() if name.endswith(".xml")}
        self.computes = any(b"<f>" in part or b"<f " in part for part in parts.values())
        shared = [("".join(t.text or "" for t in one.iter(self.SPACE + "t")))
                  for one in xml.etree.ElementTree.fromstring(parts["xl/sharedStrings.xml"])]
        book = xml.etree.ElementTree.fromstring(parts["xl/workbook.xml"])
        names = [one.get("name") for one in book.iter(self.SPACE + "sheet")]
        self.sheets = {}
        for k, name in enumerate(names, 1):
            root = xml.etree.ElementTree.fromstring(parts[f"xl/worksheets/sheet{k}.xml"])
            self.sheets[name] = [self.row(one, shared) for one in root.iter(self.SPACE + "row")]

    def row(self, row, shared):
        cells = {}
        for cell in row:
            letters = re.match("[A-Z]+", cell.get("r")).group()
            column = 0
            for letter in letters:
                column = 26 * column + ord(letter) - 64
            value = cell.find(self.SPACE + "v")
            if value is not None:
                cells[column - 1] = shared[int(value.text)] if cell.get("t") == "s" else float(value.text)
        return [cells.get(k, "") for k in range(max(cells, default=-1) + 1)]

    def records(self, name, first):
        """The rows of a table as dictionaries; `first` is its first head."""
        rows = self.sheets[name]
        start = next(k for k, row in enumerate(rows) if row and row[0] == first)
        return [dict(zip(rows[start], row)) for row in rows[start + 1:]]


def table(page, start):
    return next(rows for caption, tables in page.tables.items() for rows in tables if caption.startswith(start))


class Formats(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.results, cls.books, cls.csv = {}, {}, {}
        with tempfile.TemporaryDirectory() as folder:
            for name in MODELS:
                page, findings = pathlib.Path(folder) / "page.html", pathlib.Path(folder) / "findings.json"
                book, rows = pathlib.Path(folder) / "book.xlsx", pathlib.Path(folder) / "rows.csv"
                model = str(tree.TOP / "examples" / f"{name}.yaml")
                subprocess.run([os.environ["IDLEWIRE"], "predict", model, "--quiet", "--html", str(page), "--json",
                                str(findings), "--xlsx", str(book), "--csv", str(rows)], check=True, capture_output=True)
                cls.books[name] = Workbook(book)
                cls.csv[name] = list(csv.DictReader(io.StringIO(rows.read_text("utf-8"), newline="")))
                cls.results[name] = (Page(page.read_text("utf-8")), json.loads(findings.read_text("utf-8")))

    def test_the_ranked_list_says_what_the_json_says(self):
        for name, (page, findings) in self.results.items():
            head, *rows = table(page, "Conductors that are neither")
            by_id = {c["id"]: c for c in findings["conductors"]}
            ranked = [r[1] for r in rows if r[0] != "-"]
            self.assertEqual(ranked, [c["id"] for c in findings["conductors"] if c["rank"]], name)
            for row in rows:
                cells = dict(zip(head, row))
                conductor = by_id[cells["conductor"]]
                verdict = conductor["misleads"]["how"]
                self.assertEqual(cells["verdict"], "not flagged" if verdict == "no" else verdict)
                where, _, reference = cells["at"].partition(" to ")
                place = next(p for p in conductor["places"] if p["place"] == where)
                self.assertEqual(cells["source impedance"], ohms(place["source_impedance"]["ohms"]), row)
                for reading in place["readings"]:
                    if reading["reference"] == (reference or "ground") and reading["instrument"] in cells:
                        self.assertEqual(cells[reading["instrument"]], volts(reading["volts"]), row)

    def test_every_conductor_of_the_json_is_in_the_page(self):
        for name, (page, findings) in self.results.items():
            listed = {r[1] for r in table(page, "Conductors that are neither")[1:]}
            listed |= {r[0] for r in table(page, "Fed or grounded")[1:]}
            self.assertEqual(listed, {c["id"] for c in findings["conductors"]}, name)

    def test_contributions_add_up(self):
        for name, (page, findings) in self.results.items():
            tables = [t for caption, ts in page.tables.items() if caption.startswith("Who puts it there") for t in ts]
            self.assertTrue(tables, name)
            for _, *rows in tables:
                parts = [float(r[4].removesuffix(" V")) for r in rows[:-1]]
                total = float(rows[-1][4].removesuffix(" V"))
                # Each figure is rounded to 0.01 V.
                self.assertAlmostEqual(sum(parts), total, delta=0.005 * (len(parts) + 1) + 1e-9)

    def test_readings_stand_on_the_sheets(self):
        for name, (page, findings) in self.results.items():
            given = [cell for caption, ts in page.tables.items() if caption.startswith("Readings") for t in ts
                     for row in t[1:] for cell in row[1:] if cell != "-"]
            flagged = {r[1] for r in table(page, "Conductors that are neither")[1:]}
            expected = [r["appearance"] for c in findings["conductors"] if c["id"] in flagged
                        for p in c["places"] for r in p["readings"] if "indicates" not in r]
            found = [re.search(r"live_like|dead_like|unclear", cell).group() for cell in given]
            self.assertEqual(sorted(found), sorted(expected), name)

    def test_links_lead_somewhere_and_nothing_is_fetched(self):
        for name, (page, _) in self.results.items():
            self.assertEqual(len(page.ids), len(set(page.ids)), name)
            self.assertTrue(all(link.startswith("#") and link[1:] in page.ids for link in page.links), name)
            self.assertEqual(page.fetches, [], name)

    def test_the_workbook_says_what_the_json_and_the_csv_say(self):
        for name, (_, findings) in self.results.items():
            book = self.books[name]
            ranked = book.records("Ranked list", "rank")
            self.assertEqual([r["conductor"] for r in ranked], [c["id"] for c in findings["conductors"]], name)
            self.assertEqual([r["rank"] or None for r in ranked], [c["rank"] for c in findings["conductors"]])
            # Spreadsheets keep fifteen digits, the file format sixteen.
            close = lambda a, b: self.assertTrue(math.isclose(a, b, rel_tol=1e-15, abs_tol=1e-300), (a, b))
            sheets = iter(book.records("Sheets", "conductor"))
            readings, rows = iter(book.records("Readings", "conductor")), iter(self.csv[name])
            for c in findings["conductors"]:
                for p in c["places"]:
                    sheet = next(sheets)
                    self.assertEqual((sheet["conductor"], sheet["at"]), (c["id"], p["place"]))
                    close(sheet["open circuit (V)"], p["open_circuit"]["volts"])
                    close(sheet["source impedance (ohm)"], p["source_impedance"]["ohms"])
                    close(sheet["short circuit, computed (A)"], p["short_circuit_A"])
                    for r in p["readings"]:
                        given, row = next(readings), next(rows)
                        self.assertEqual((given["conductor"], given["instrument"], given["to"], given["appearance"]),
                                         (c["id"], r["instrument"], r["reference"], r["appearance"]))
                        close(given["reading (V)"], r["volts"])
                        self.assertEqual((row["conductor"], row["instrument"], float(row["reading_V"])),
                                         (c["id"], r["instrument"], r["volts"]))
                        for percentile in ("p05", "p50", "p95"):
                            value = r[percentile]
                            self.assertEqual(row[f"reading_{percentile}_V"], "" if value is None else repr(value)
                                             .removesuffix(".0"))
                            if value is not None:
                                close(given[f"{percentile} (V)"], value)
            self.assertEqual((list(sheets), list(readings), list(rows)), ([], [], []))

    def test_every_sheet_of_the_workbook_carries_the_caution(self):
        for name, book in self.books.items():
            self.assertEqual(list(book.sheets), ["Ranked list", "Sheets", "Readings", "Contributions", "Test sheets",
                                                 "Notes"])
            for sheet, rows in book.sheets.items():
                text = " ".join(str(cell) for row in rows for cell in row)
                self.assertIn("A prediction is not a test.", text, (name, sheet))
                self.assertIn("A reading that agrees with this sheet proves nothing. Void once", text, (name, sheet))
            if name.startswith("03"):
                text = str(book.sheets["Test sheets"])
                self.assertIn("isolated supply: no reading to ground settles it; treat as live", text)

    def test_text_that_looks_like_a_formula_stays_text(self):
        source = (tree.TOP / "examples" / "01-one-circuit" / "emt.yaml").read_text("utf-8")
        planted = {"spare-1:": "'=1+1':", "Store room": "'=SUM(A1)'", "title: ": "title: '+1' #", "C1": "-2-3"}
        for old, new in planted.items():
            self.assertIn(old, source)
            source = source.replace(old, new)
        with tempfile.TemporaryDirectory() as folder:
            model, book = pathlib.Path(folder) / "model.yaml", pathlib.Path(folder) / "book.xlsx"
            model.write_text(source, "utf-8")
            subprocess.run([os.environ["IDLEWIRE"], "predict", str(model), "--quiet", "--xlsx", str(book)], check=True,
                           capture_output=True)
            made = Workbook(book)
        self.assertFalse(made.computes)
        cells = {cell for rows in made.sheets.values() for row in rows for cell in row}
        self.assertLessEqual({"=1+1.a", "=SUM(A1)", "+1", "-2-3.raceway"}, cells)


if __name__ == "__main__":
    unittest.main()
