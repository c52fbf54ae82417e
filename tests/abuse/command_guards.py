"""What the command must not lose, keep silent about or begin: inputs named as outputs, hazards of a campaign, rows of a ledger that was
thrown away, values that cannot stand where they go.

usage: /usr/bin/python3 command_guards.py LEAT_BINARY [unittest options], or LEAT in the environment.
"""
import json
import os
import shutil
import signal
import sqlite3
import subprocess
import tempfile
import time
import unittest

import command_support as support

LEAT = support.binary()
CASE, BEAKER, RESIDUE = "3_chloro_residue.yaml", "beaker_silver_ammonia.yaml", "1_ammine_residue.yaml"
CAMPAIGN = "leat: 1\nkind: campaign\ntitle: guards (invented)\nof: {case}\nvary:\n  {vary}\nwatch: [{watch}]\nthrough_time: {through}\n"


class InFolder(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.mkdtemp(prefix="leat_guards_")
        self.addCleanup(shutil.rmtree, self.folder, True)
        for name in (CASE, BEAKER, RESIDUE):
            shutil.copy(os.path.join(support.FLOWSHEETS, name), self.folder)

    def path(self, name):
        return os.path.join(self.folder, name)

    def put(self, name, text):
        with open(self.path(name), "w", encoding="utf-8") as file:
            file.write(text)

    def leat(self, *words, code=0):
        done = support.run([LEAT, *words], self.folder)
        self.assertEqual(done.code, code, done.out + done.err)
        return done

    def campaign(self, vary, case=CASE, watch="recovery.Pb", through="false", more=""):
        self.put("c.yaml", CAMPAIGN.format(case=case, vary=vary, watch=watch, through=through) + more)


class Outputs(InFolder):
    def test_an_input_is_never_replaced(self):
        before = {name: support.read_text(self.path(name)) for name in (CASE, BEAKER, RESIDUE)}
        self.leat("run", CASE, "--out", CASE, code=1)
        self.leat("speciate", BEAKER, "--out", "./" + BEAKER, code=1)
        self.leat("ladder", CASE, "--vary", "streams.liquor.rate: 60 to 120 m3/h in 2 points", "--out", CASE, code=1)
        self.assertIn("no results file", self.leat("run", CASE, "--out", RESIDUE, code=1).err)
        self.assertEqual({name: support.read_text(self.path(name)) for name in before}, before)

    def test_results_are_replaced(self):
        self.leat("run", CASE, "--out", "r.h5")
        self.leat("run", CASE, "--out", "r.h5")
        self.assertIn("leat report", self.leat("run", "r.h5", code=2).err)


class Campaigns(InFolder):
    VARY = "streams.liquor.rate: 80 m3/h to 120 m3/h in 3 points"

    def test_hazards_are_told(self):
        self.campaign("streams.wash.rate: [3 m3/h, 4 m3/h]", case=RESIDUE, watch="recovery.Ag")
        told = json.loads(self.leat("campaign", "c.yaml", "--json").out)["cautions"]
        for kind in ("ammonia vapour", "silver ammine", "estimates only"):
            self.assertTrue(any(line.startswith(kind + ":") for line in told), told)
        self.assertTrue(any("2 cases have such a caution" in line for line in told), told)
        self.assertTrue(told[-1].startswith("estimates only"))
        again = json.loads(self.leat("report", "outputs/c.ledger", "--json").out)
        self.assertEqual([line for line in again["cautions"]], told)
        self.assertIn("silver ammine", support.read_text(self.path("outputs/c.html")))

    def test_values_are_tried_before_the_start(self):
        self.campaign("streams.liquor.rate: 60 to 180 in 3 points")
        err = self.leat("campaign", "c.yaml", code=2).err
        self.assertRegex(err, r"c\.yaml:6:\d+ streams\.liquor\.rate: '60': .*has no unit")
        self.assertIn("3 faults", err)
        self.put("v.csv", "streams.liquor.rate\n100 m3/h\nabc\n")
        self.put("c.yaml", f"leat: 1\nkind: campaign\nof: {CASE}\ncases: v.csv\nwatch: [recovery.Pb]\n")
        self.assertIn("'abc'", self.leat("campaign", "c.yaml", code=2).err)
        self.assertFalse(os.path.exists(self.path("outputs")))

    def test_a_name_that_only_some_cases_have(self):
        self.campaign("circuit.L.tanks: [1, 2, 3]", watch="recovery.Pb, ph.L.3")
        rows = json.loads(self.leat("campaign", "c.yaml", "--json").out)["tables"]["cases"]["rows"]
        self.assertEqual([row[3] is None for row in rows], [True, True, False])
        self.campaign("circuit.L.tanks: [1, 2, 3]", watch="recovery.Pb, ph.L.4")
        self.assertIn("ph.L.4", self.leat("campaign", "c.yaml", "--out", "other.ledger", code=2).err)

    def test_a_ledger_thrown_away_does_not_come_back(self):
        """A killed campaign leaves its log; beside a new ledger of that name it must not be read."""
        self.campaign("streams.liquor.rate: 80 m3/h to 120 m3/h in 200 points")
        with subprocess.Popen([LEAT, "campaign", "c.yaml"], cwd=self.folder, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL) as started:
            ledger, until = self.path("outputs/c.ledger"), time.monotonic() + 30
            while time.monotonic() < until and not (os.path.exists(ledger + "-wal") and os.path.getsize(ledger + "-wal") > 20000):
                time.sleep(0.02)
            started.send_signal(signal.SIGKILL)
        self.assertGreater(os.path.getsize(ledger + "-wal"), 20000)
        os.remove(ledger)
        self.campaign(self.VARY)
        self.assertIn("3 of them now", self.leat("campaign", "c.yaml").out)
        database = sqlite3.connect(ledger)
        self.addCleanup(database.close)
        self.assertEqual(database.execute("SELECT count(*), sum(status = 'done') FROM cases").fetchone(), (3, 3))

    def test_a_results_file_that_is_gone_is_made_again(self):
        self.campaign(self.VARY)
        self.leat("campaign", "c.yaml")
        os.remove(self.path("outputs/c.cases/000002.h5"))
        self.assertIn("1 of them now", self.leat("campaign", "c.yaml").out)
        support.open_whole(self.path("outputs/c.cases/000002.h5"))

    def test_ledgers_share_no_folder(self):
        self.campaign(self.VARY)
        self.leat("campaign", "c.yaml", "--out", "wash.1")
        self.leat("campaign", "c.yaml", "--out", "wash.2")
        self.assertTrue(os.path.exists(self.path("wash.1.cases/000001.h5")) and os.path.exists(self.path("wash.2.cases/000001.h5")))

    def test_report_of_a_ledger_has_its_tables(self):
        self.campaign(self.VARY)
        self.leat("campaign", "c.yaml")
        self.assertTrue(self.leat("report", "outputs/c.ledger", "--csv", "ranking").out.startswith("case,recovery.Pb [1],streams.liquor.rate\r\n"))
        self.assertIn("status, ranking, failures, cases", self.leat("report", "outputs/c.ledger", "--csv", "nothing", code=1).err)


if __name__ == "__main__":
    unittest.main()
