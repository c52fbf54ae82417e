#!/usr/bin/python3
"""Pages of results, opened in a headless browser: nothing asked of a network, nothing complained about, every chart drawn, nothing
wider than the window, numbers equal to those of the results file, hostile names harmless, readable without scripts.

    open_pages.py LEAT_BINARY [--screenshots FOLDER]
"""
import html.parser
import json
import os
import re
import shutil
import sqlite3
import sys
import tempfile
import unittest

import h5py

sys.path.insert(0, os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "abuse"))
from browser import Browser, chromium  # noqa: E402
from command_support import FLOWSHEETS, binary, read_text, run  # noqa: E402

LEAT = ""
SIZE_LIMIT = 1_500_000  # bytes, small enough to mail
SCREENSHOTS = None
CIRCUITS = ["1_ammine_residue", "2_cyano_ore", "3_chloro_residue"]
HOSTILE = "<script>alert(1)</script>"
CAMPAIGN = """leat: 1
kind: campaign
title: wash and recycle (invented)
of: 1_ammine_residue.yaml
vary:
  streams.wash.rate: 2 m3/h to 6 m3/h in 3 points
  circuit.L.tanks: [1, 2]
  solids.residue.phases.hematite: [42 %, 99 %]      # with the other minerals the second passes 100 %: a fault of the case
watch: [recovery.Ag, recovery.Cu, ph.L.1]
rank: {by: recovery.Ag, best: largest}
through_time: false
"""

# What must be true of a page as drawn; gives a list of what is not.
DRAWN = """(() => {
  const data = JSON.parse(document.getElementById("page-data").textContent), wrong = [];
  for (const chart of data.charts) {
    const svg = document.querySelector(`[data-chart="${chart.id}"] svg`);
    const marks = document.querySelectorAll(`[data-chart="${chart.id}"] .canvas svg path`).length;
    if (!svg) wrong.push(`${chart.id}: not drawn`);
    else if (marks < 4) wrong.push(`${chart.id}: ${marks} marks`);
    if (chart.views && chart.kind !== "spans" && chart.views[0].series.length > 1) {
      const legend = document.querySelectorAll(`[data-chart="${chart.id}"] .legend button`).length;
      if (legend !== chart.views[0].series.length) wrong.push(`${chart.id}: ${legend} entries in the legend`);
    }
  }
  if (data.flow) {
    const operations = [...document.querySelectorAll("[data-operation]")].map((one) => one.dataset.operation);
    const streams = [...document.querySelectorAll("[data-stream]")].map((one) => one.dataset.stream);
    for (const one of data.flow.operations) if (!operations.includes(one.name)) wrong.push(`no operation ${one.name}`);
    for (const one of data.flow.streams) if (!streams.includes(one.name)) wrong.push(`no stream ${one.name}`);
    for (const line of document.querySelectorAll(".diagram .line")) if (!(line.getTotalLength() > 5)) wrong.push("a stream without length");
  }
  return wrong;
})()"""
OVERFLOW = "document.documentElement.scrollWidth - document.documentElement.clientWidth"
SCRIPTS_IN = "document.querySelectorAll('main script, main iframe, main img, main object').length"


class Tables(html.parser.HTMLParser):
    """Tables of a page as rows of cells (text, value in full), by name."""

    def __init__(self, text):
        super().__init__()
        self.tables, self.name, self.cell, self.rows = {}, None, None, []
        self.feed(text)

    def handle_starttag(self, tag, attributes):
        attributes = dict(attributes)
        if tag == "table":
            self.name, self.rows = attributes.get("data-table"), []
        elif tag == "tr" and self.name:
            self.rows.append([])
        elif tag in ("td", "th") and self.name:
            self.cell = ["", attributes.get("data-v")]

    def handle_endtag(self, tag):
        if tag in ("td", "th") and self.cell is not None:
            self.rows[-1].append(tuple(self.cell))
            self.cell = None
        elif tag == "table" and self.name:
            self.tables.setdefault(self.name, self.rows)
            self.name = None

    def handle_data(self, data):
        if self.cell is not None:
            self.cell[0] += data


def leat(folder, *words, code=0, seconds=240):
    done = run([LEAT, *words], folder, seconds)
    if done.code != code:
        raise AssertionError(f"{words}: {done.code}, not {code}\n{done.err}")
    return done


def labels(file, axis):
    return [one.decode() for one in file[axis][()]]


class Pages(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        if chromium() is None:
            raise AssertionError("chromium is needed to open the pages")
        cls.folder = tempfile.mkdtemp(prefix="leat-pages-")
        for name in os.listdir(FLOWSHEETS):
            if os.path.isfile(os.path.join(FLOWSHEETS, name)):
                shutil.copy(os.path.join(FLOWSHEETS, name), cls.folder)
        for name in CIRCUITS:
            leat(cls.folder, "run", f"{name}.yaml", "--out", f"{name}.h5")
            leat(cls.folder, "report", f"{name}.h5")
        leat(cls.folder, "speciate", "beaker_silver_ammonia.yaml", "--out", "beaker.h5")
        leat(cls.folder, "report", "beaker.h5")
        leat(cls.folder, "ladder", "ladder_three_lixiviants.yaml", "--out", "series.h5")
        leat(cls.folder, "ladder", "1_ammine_residue.yaml", "--vary", "chemistry.activity: [davies, ideal]", "--out", "words.h5")
        with open(os.path.join(cls.folder, "wash.yaml"), "w", encoding="utf-8") as file:
            file.write(CAMPAIGN)
        run([LEAT, "campaign", "wash.yaml", "--out", "wash.ledger"], cls.folder, 240)
        for name in ("series", "words"):
            leat(cls.folder, "report", f"{name}.h5")
        leat(cls.folder, "report", "wash.ledger", "--pages", "2")
        cls.pages = [*CIRCUITS, "beaker", "series", "words", "wash"]
        cls.browser = Browser()

    @classmethod
    def tearDownClass(cls):
        cls.browser.close()
        shutil.rmtree(cls.folder, ignore_errors=True)

    def path(self, name):
        return os.path.join(self.folder, name)

    def check_open(self, page, name):
        self.assertTrue(page.value("document.documentElement.classList.contains('drawn')"), f"{name}: not drawn to the end; {page.trouble()}")
        self.assertEqual(page.value(DRAWN), [], name)
        self.assertLessEqual(page.value(OVERFLOW), 0, f"{name}: wider than its window")
        self.assertEqual(page.trouble(), [], name)
        self.assertEqual(page.requests(), [], name)
        self.assertEqual(page.value(SCRIPTS_IN), 0, name)

    def test_every_page_opens(self):
        for name in self.pages:
            page = self.browser.open(self.path(f"{name}.html"), 400)
            for width in (400, 1400):
                for tone in ("light", "dark"):
                    with self.subTest(name=name, width=width, tone=tone):
                        page.show(width, tone)
                        self.check_open(page, name)
                        if SCREENSHOTS:
                            page.screenshot(os.path.join(SCREENSHOTS, f"{name}-{width}-{tone}.png"))
            page.close()

    def test_theme_width_and_choices(self):
        page = self.browser.open(self.path("1_ammine_residue.html"))
        page.value("document.getElementById('theme').click()")
        self.assertEqual(page.value("getComputedStyle(document.body).backgroundColor"), "rgb(22, 24, 27)")
        page.show(400, "light")  # the button has been pressed: dark stays
        self.assertEqual(page.value("getComputedStyle(document.body).backgroundColor"), "rgb(22, 24, 27)")
        self.check_open(page, "in the dark and narrow")
        page.value("document.querySelectorAll('select').forEach((one) => { one.selectedIndex = one.options.length - 1; one.dispatchEvent(new Event('change')); })")
        page.wait_for("document.querySelector('.diagram svg')")
        page.value("document.querySelectorAll('.legend button').forEach((one) => one.click())")
        page.value("document.querySelectorAll('button.sort').forEach((one) => one.click())")
        page.value("document.querySelectorAll('input[type=search]').forEach((one) => { one.value = 'Ag'; one.dispatchEvent(new Event('input')); })")
        self.assertEqual(page.trouble(), [])
        shown = page.value("[...document.querySelectorAll('table[data-table=constants] tbody tr')].filter((row) => !row.hidden).map((row) => row.textContent)")
        self.assertTrue(shown and all("ag" in row.lower() for row in shown))
        page.close()

    def test_streams_tell_their_numbers_to_the_keyboard(self):
        page = self.browser.open(self.path("1_ammine_residue.html"))
        self.assertIn("T1.overflow", page.value("(document.querySelector('[data-stream=\"T1.overflow\"]').focus(), document.querySelector('.panel').textContent)"))
        self.assertIn("Cu dissolved", page.value("document.querySelector('.panel').textContent"))
        self.assertTrue(page.value("[...document.querySelectorAll('.stream, .operation')].every((one) => one.getAttribute('aria-label') && one.tabIndex === 0)"))
        page.close()

    def test_numbers_equal_those_of_the_file(self):
        for name in CIRCUITS:
            rows = Tables(read_text(self.path(f"{name}.html"))).tables["recovery"]
            titles = [text for text, _ in rows[0]]
            with h5py.File(self.path(f"{name}.h5")) as file:
                for metal, recovery, extraction in zip(labels(file, "element"), file["steady_recovery"][()], file["steady_extraction"][()]):
                    row = next(one for one in rows if one[0][0] == metal)
                    for title, value in (("recovery", recovery), ("extraction", extraction)):
                        cell = row[next(k for k, text in enumerate(titles) if text.startswith(title))]
                        self.assertAlmostEqual(float(cell[1]), 100 * value, delta=1e-9 * max(1, abs(100 * value)))
                        self.assertAlmostEqual(float(cell[0]), 100 * value, delta=6e-4 * abs(100 * value))
        with h5py.File(self.path("beaker.h5")) as file:
            rows = Tables(read_text(self.path("beaker.html"))).tables["steps"]
            ph = [text for text, _ in rows[0]].index("pH")
            for row, value in zip(rows[1:], file["ph"][()]):
                self.assertAlmostEqual(float(row[ph][1]), value, delta=1e-12)

    def test_charts_hold_the_file_s_numbers(self):
        data = json.loads(re.search(r'id="page-data">(.*?)</script>', read_text(self.path("1_ammine_residue.html"))).group(1))
        chart = next(one for one in data["charts"] if one["id"] == "recovery-through-time")
        with h5py.File(self.path("1_ammine_residue.h5")) as file:
            silver = labels(file, "element").index("Ag")
            for time, value in zip(chart["x"]["numbers"], chart["views"][0]["series"][0]["values"]):
                row = list(file["time"][()]).index(time)
                self.assertAlmostEqual(value, 100 * file["recovery"][row, silver], delta=1e-5 * abs(value) + 1e-12)

    def test_campaign_links_its_leading_cases(self):
        text = read_text(self.path("wash.html"))
        links = re.findall(r'href="(wash\.cases/\d{6}\.html)"', text)
        self.assertEqual(len(links), 2)
        with sqlite3.connect(self.path("wash.ledger")) as ledger:
            best = ledger.execute("SELECT number FROM results WHERE watched = 'recovery.Ag' AND value IS NOT NULL ORDER BY value DESC LIMIT 2").fetchall()
        self.assertEqual({f"wash.cases/{number:06d}.html" for (number,) in best}, set(links))
        for link in links:
            page = self.browser.open(self.path(link))
            self.check_open(page, link)
            page.close()
        self.assertIn('data-status="input_fault"', text)

    def test_same_data_same_bytes_and_small(self):
        for name in self.pages:
            self.assertLess(os.path.getsize(self.path(f"{name}.html")), SIZE_LIMIT, name)
        leat(self.folder, "report", "2_cyano_ore.h5", "--out", "again.html")
        self.assertEqual(read_text(self.path("again.html")), read_text(self.path("2_cyano_ore.html")))

    def test_notices_are_kept(self):
        text = read_text(self.path("1_ammine_residue.html"))
        for words in ("Apache License", "Eclipse Public License", "BSD 3-Clause License", "Copyright 2017-2024 The Apache Software Foundation"):
            self.assertIn(words, text)

    def test_readable_without_scripts(self):
        page = self.browser.open(self.path("1_ammine_residue.html"), 400, scripts=False)
        self.assertEqual(page.value("document.documentElement.className"), "")
        self.assertIn("89.54", page.value("document.body.innerText"))
        self.assertLessEqual(page.value(OVERFLOW), 0)
        self.assertEqual(page.trouble(), [])
        page.close()
        tables = Tables(read_text(self.path("1_ammine_residue.html"))).tables
        for name in ("recovery", "streams", "stages", "constants", "where-metal-goes", "ph-through-time"):
            self.assertIn(name, tables)

    def test_hostile_names_are_harmless(self):
        text = read_text(self.path("3_chloro_residue.yaml"))
        title = re.search(r"^title: (.*)$", text, re.M).group(1)
        text = text.replace(title, f"'{HOSTILE} </script><!-- & \" title'") + f"\n# {HOSTILE} </pre></script><img src=x onerror=alert(2)>\n"
        with open(self.path("hostile.yaml"), "w", encoding="utf-8") as file:
            file.write(text)
        leat(self.folder, "run", "hostile.yaml", "--out", "hostile.h5")
        with h5py.File(self.path("hostile.h5"), "r+") as file:
            for axis, texts in (("stream", ()), ("operation", ("stream_from", "stream_to")), ("element", ()), ("species", ()), ("family", ())):
                old = file[axis][0].decode()
                new = f"{HOSTILE}--><!--<img src=http://127.0.0.1/x onerror=alert(3)>{axis}"
                file[axis][0] = new
                for name in texts:
                    file[name][()] = [new if one.decode() == old else one.decode() for one in file[name][()]]
        leat(self.folder, "report", "hostile.h5")
        page = self.browser.open(self.path("hostile.html"))
        page.value("document.querySelectorAll('.stream, .operation').forEach((one) => one.focus())")
        self.check_open(page, "hostile names")
        self.assertIn(HOSTILE, page.value("document.title"))
        for place in ("dl.heads", "table[data-table=streams]", "[data-chart=where-metal-goes] .legend", ".diagram svg"):
            self.assertIn(HOSTILE, page.value(f"document.querySelector('{place}').textContent"), place)
        page.close()

    def test_refusals(self):
        with open(self.path("text.h5"), "w", encoding="utf-8") as file:
            file.write("no results")
        self.assertIn("neither a results file nor a ledger", leat(self.folder, "report", "text.h5", code=2).err)
        self.assertIn("cannot be read", leat(self.folder, "report", "missing.h5", code=2).err)
        with open(self.path("beaker.h5"), "rb") as whole, open(self.path("cut.h5"), "wb") as cut:
            cut.write(whole.read()[:9000])
        leat(self.folder, "report", "cut.h5", code=2)
        with h5py.File(self.path("other.h5"), "w") as file:
            file["x"] = 1
        leat(self.folder, "report", "other.h5", code=2)
        with sqlite3.connect(self.path("other.db")) as ledger:
            ledger.execute("CREATE TABLE x (y)")
        leat(self.folder, "report", "other.db", code=2)
        leat(self.folder, "report", "beaker.h5", "--out", "beaker.h5", code=1)
        with open(self.path("file"), "w", encoding="utf-8") as file:
            file.write("")
        leat(self.folder, "report", "beaker.h5", "--out", "file/page.html", code=4)
        told = json.loads(leat(self.folder, "report", "beaker.h5", "--json").out)
        self.assertEqual(told["status"], "done")
        self.assertIn("steps", told["tables"])


def main():
    global LEAT, SCREENSHOTS
    LEAT = binary()
    if "--screenshots" in sys.argv:
        at = sys.argv.index("--screenshots")
        SCREENSHOTS = os.path.abspath(sys.argv[at + 1])
        os.makedirs(SCREENSHOTS, exist_ok=True)
        del sys.argv[at:at + 2]
    unittest.main(verbosity=2)


if __name__ == "__main__":
    main()
