"""Campaigns under blows: workers and the command itself killed at random moments, interrupted, without room, in parts.

usage: /usr/bin/python3 campaign_kills.py LEAT_BINARY [unittest options], or LEAT in the environment.

Whatever happens, a later start ends with the rows an undisturbed campaign has: nothing lost, nothing twice, the same digest.
"""
import os
import random
import re
import resource
import shutil
import signal
import sqlite3
import subprocess
import tempfile
import time
import unittest

import command_support as support

LEAT = support.binary()
BLOWS = 40     # half of them on workers, half on the command
SEED = 52117   # any number; the same one always, so that a fault can be met again
CASES = 48
NOBODY = 65534
CAMPAIGN = """leat: 1
kind: campaign
title: washing and tanks, invented
of: case.yaml
vary:
  streams.wash.rate: 2 m3/h to 6 m3/h in {rates} points
  circuit.L.tanks: [1, 2, 3, 4]
watch: [recovery.Ag, recovery.Cu, ph.L.1]
rank: {{by: recovery.Ag, best: largest}}
through_time: false
time_limit: {limit}
"""


def children(parent):
    """Processes started by a process and not yet gone."""
    found = []
    for name in os.listdir("/proc"):
        if not name.isdigit():
            continue
        try:
            with open(f"/proc/{name}/stat", encoding="utf-8", errors="replace") as file:
                state, its_parent = file.read().rsplit(")", 1)[1].split()[:2]
        except OSError:
            continue
        if int(its_parent) == parent and state != "Z":
            found.append(int(name))
    return found


def lives(process):
    try:
        with open(f"/proc/{process}/stat", encoding="utf-8", errors="replace") as file:
            return file.read().rsplit(")", 1)[1].split()[0] != "Z"
    except OSError:
        return False


class InCampaignFolder(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.mkdtemp(prefix="leat_campaign_kills_")
        self.addCleanup(shutil.rmtree, self.folder, True)
        shutil.copy(os.path.join(support.FLOWSHEETS, "1_ammine_residue.yaml"), self.path("case.yaml"))
        self.write(CASES)

    def path(self, name):
        return os.path.join(self.folder, name)

    def write(self, cases, limit="60 s"):
        with open(self.path("c.yaml"), "w", encoding="utf-8") as file:
            file.write(CAMPAIGN.format(rates=cases // 4, limit=limit))

    def start(self, *words):
        return subprocess.Popen([LEAT, "campaign", "c.yaml", *words], cwd=self.folder, stdout=subprocess.PIPE, stderr=subprocess.PIPE, start_new_session=True)

    def finish(self, *words, code=0):
        done = support.run([LEAT, "campaign", "c.yaml", *words], self.folder, seconds=300)
        self.assertEqual(done.code, code, done.err)
        return done

    def digest(self, done):
        return re.search(r"^digest of all rows ([0-9a-f]{32})$", done.out, re.M).group(1)

    def query(self, sql, ledger="outputs/c.ledger"):
        database = sqlite3.connect(self.path(ledger))
        try:
            return database.execute(sql).fetchall()
        finally:
            database.close()

    def rows(self, ledger="outputs/c.ledger"):
        """{number: (status, reason, values ...)}"""
        found = {number: (status, reason) for number, status, reason in self.query("SELECT number, status, reason FROM cases", ledger)}
        for number, _, value in self.query("SELECT number, watched, value FROM results ORDER BY number, watched", ledger):
            found[number] += (value,)
        return found

    def assert_gone(self, processes):
        end = time.monotonic() + 10
        while any(lives(one) for one in processes):
            self.assertLess(time.monotonic(), end, "workers live on")
            time.sleep(0.01)

    def assert_tidy(self):
        """One ledger, one whole results file a case that is done, nothing else."""
        names = support.files_under(self.path("outputs"))
        done = [number for number, row in sorted(self.rows().items()) if row[0] == "done"]
        self.assertGreater(len(done), 10)
        self.assertEqual(names, ["c.cases"] + [f"c.cases/{number:06}.h5" for number in done] + ["c.ledger"])
        for name in names:
            if name.endswith(".h5"):
                support.open_whole(self.path(os.path.join("outputs", name)))


class Killed(InCampaignFolder):
    def test_kills(self):
        begin = time.monotonic()
        whole = self.finish()
        length = time.monotonic() - begin
        expected, digest = self.rows(), self.digest(whole)
        shutil.rmtree(self.path("outputs"))
        self.chance = chance = random.Random(SEED)
        plan = ["worker", "command"] * (BLOWS // 2)
        chance.shuffle(plan)
        self.finished, self.workers, self.run = {}, [], None
        for blow, at in enumerate(plan):
            with self.subTest(blow=blow, at=at):
                self.strike(at, chance.uniform(0, 2 * length / BLOWS), expected)
        if self.run:
            self.run.communicate(timeout=300)
        last = self.finish()
        self.look(expected)
        if any(row[0] == "crashed" for row in self.rows().values()):  # a case that was struck twice
            last = self.finish("--retry")
        self.assertEqual(self.rows(), expected)
        self.assertEqual(self.digest(last), digest)
        self.assertEqual(self.query("SELECT count(*) FROM cases") + self.query("SELECT count(*) FROM results"), [(CASES,), (3 * CASES,)])
        self.assert_tidy()

    def strike(self, at, wait, expected):
        """Waits, then kills a worker, or the command with a look at what it left."""
        if self.run is None or self.run.poll() is not None:
            self.run = self.start()
            self.addCleanup(self.run.kill)
            self.addCleanup(self.run.stdout.close)
            self.addCleanup(self.run.stderr.close)
        time.sleep(wait)
        end = time.monotonic() + 20
        while not (workers := children(self.run.pid)):
            self.assertIsNone(self.run.poll(), "the campaign ended before all blows were struck")
            self.assertLess(time.monotonic(), end, "no worker appears")
        if at == "worker":
            os.kill(self.chance.choice(workers), signal.SIGKILL)
            return
        self.run.kill()
        self.run.wait()
        self.assert_gone(workers)
        self.look(expected)

    def look(self, expected):
        """What was finished stays as it was, and what is finished is right."""
        if not os.path.exists(self.path("outputs/c.ledger")):
            self.assertEqual(self.finished, {})
            return
        rows = self.rows()
        self.assertEqual(sorted(rows), list(range(1, CASES + 1)))
        for number, row in rows.items():
            if row[0] == "waiting":
                self.assertNotIn(number, self.finished)
            elif row[0] == "crashed":
                self.assertEqual(row[1], "its process was ended twice by signal 9 (Killed)")
            else:
                self.assertEqual(row, expected[number])
            if row[0] != "waiting":
                self.finished[number] = row


class Interrupted(InCampaignFolder):
    def count_done(self):
        return self.query("SELECT count(*) FROM cases WHERE status = 'done'")[0][0] if os.path.exists(self.path("outputs/c.ledger")) else 0

    def interrupt(self, number):
        """As from a terminal: the signal goes to everybody of the group."""
        run = self.start()
        end = time.monotonic() + 60
        before = self.count_done()
        while self.count_done() == before:  # so that it is well under way
            self.assertLess(time.monotonic(), end)
            time.sleep(0.05)
        workers = children(run.pid)
        os.killpg(run.pid, number)
        out, err = run.communicate(timeout=30)
        self.assertEqual(run.returncode, 4, err)
        self.assertRegex(err.decode(), r"stopped with \d+ of \d+ cases finished; started again it goes on from there")
        self.assertIn(b"waiting; started again", out)
        self.assert_gone(workers)
        self.assertNotIn("crashed", [row[0] for row in self.rows().values()])

    def test_interrupt_and_terminate(self):
        self.write(20)
        self.interrupt(signal.SIGINT)
        self.interrupt(signal.SIGTERM)
        done = self.finish()
        rows = self.rows()
        self.assert_tidy()
        shutil.rmtree(self.path("outputs"))
        self.assertEqual(self.digest(self.finish("--workers", "1")), self.digest(done))
        self.assertEqual(self.rows(), rows)

    def test_one_at_a_time(self):
        run = self.start()
        end = time.monotonic() + 60
        while not os.path.exists(self.path("outputs/c.ledger")):
            self.assertLess(time.monotonic(), end)
            time.sleep(0.02)
        told = self.finish(code=4).err
        self.assertIn("another campaign is at work on it (process", told)
        run.kill()
        run.communicate()

    def test_time_limit(self):
        self.write(8, "0.01 s")
        told = self.finish(code=3)
        self.assertIn("not one case was solved", told.err)
        self.assertRegex(told.out, r"timed_out +8 +1 +took longer than 0.01 s")
        self.write(8)
        self.assertRegex(self.finish("--retry").out, r"done +[78]")


class InParts(InCampaignFolder):
    def test_three_shards(self):
        self.write(12)
        digest = self.digest(self.finish())
        shutil.rmtree(self.path("outputs"))
        parts = [f"outputs/c.{k}-of-3.ledger" for k in (1, 2, 3)]
        for k in (1, 2, 3):
            self.finish("--shard", f"{k}/3")
        self.assertRegex(self.finish("--merge", *parts[:2]).out, r"waiting +4")
        merged = self.finish("--merge", *parts)
        self.assertEqual(self.digest(merged), digest)
        for file, in self.query("SELECT results_file FROM cases WHERE status = 'done'"):
            support.open_whole(self.path(os.path.join("outputs", file)))
        self.assertEqual(self.digest(self.finish()), digest)
        self.query_changes("outputs/c.2-of-3.ledger", "UPDATE results SET value = value * 1.0001 WHERE number = 8 AND watched = 'recovery.Ag'")
        self.assertIn("case 8 is told differently by", self.finish("--merge", *parts, code=2).err)
        self.assertEqual(self.digest(self.finish()), digest)

    def query_changes(self, ledger, sql):
        database = sqlite3.connect(self.path(ledger))
        database.execute(sql)
        database.commit()
        database.close()


class WithoutRoom(InCampaignFolder):
    def setUp(self):
        super().setUp()
        self.write(16)

    def run_with(self, before, code):
        done = support.run([LEAT, "campaign", "c.yaml"], self.folder, seconds=120, before=before)
        self.assertEqual(done.code, code, done.err)
        return done

    def test_no_room_for_results_files(self):
        """A limit on the size of a file that the ledger keeps and the results do not."""
        told = self.run_with(lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (120000, 120000)), 4)
        self.assertIn("cases one after the other met trouble with the machine", told.err)
        self.assertIn("waiting", {row[0] for row in self.rows().values()})
        self.assertRegex(self.finish().out, r"done +16")
        self.assert_tidy()

    def test_no_room_for_a_ledger(self):
        told = self.run_with(lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (8192, 8192)), 4)
        self.assertIn("outputs/c.ledger", told.err)
        self.assertEqual(support.files_under(self.path("outputs")), [])

    def test_full_disk(self):
        """A file system of its own that fills up, where the machine allows to make one."""
        os.mkdir(self.path("outputs"))
        command = f"mount -t tmpfs -o size=1500k none outputs && {LEAT} campaign c.yaml; code=$?; " \
                  "cp outputs/c.ledger kept.ledger; cp outputs/c.ledger-wal kept.ledger-wal 2>/dev/null; exit $code"
        done = support.run(["unshare", "-rm", "sh", "-c", command], self.folder, seconds=120)
        if "unshare" in done.err or "mount" in done.err:
            self.skipTest(done.err)
        self.assertEqual(done.code, 4, done.err)
        self.assertRegex(done.err, "No space left on device|disk is full")
        rows = self.rows("kept.ledger")
        self.assertEqual(len(rows), 16)
        self.assertIn("done", {row[0] for row in rows.values()})
        shutil.copy(self.path("kept.ledger"), self.path("outputs/c.ledger"))
        self.assertRegex(self.finish().out, r"done +16")

    def test_folder_without_permission(self):
        os.chmod(self.folder, 0o755)
        os.mkdir(self.path("outputs"))
        os.chmod(self.path("outputs"), 0o555)
        other = (lambda: os.setuid(NOBODY)) if os.geteuid() == 0 else None  # root may write anywhere
        try:
            support.run([LEAT, "--version"], self.folder, before=other)
        except (OSError, subprocess.SubprocessError):
            self.skipTest("the binary cannot be run by another user")
        self.assertIn("outputs/c.ledger.lock: Permission denied", self.run_with(other, 4).err)
        self.assertEqual(support.files_under(self.path("outputs")), [])

    def test_folder_that_is_a_file(self):
        with open(self.path("outputs"), "w", encoding="utf-8"):
            pass
        self.assertIn("outputs", self.finish(code=4).err)

    def test_damaged_ledger(self):
        self.write(8)
        self.finish()
        size = os.path.getsize(self.path("outputs/c.ledger"))
        os.truncate(self.path("outputs/c.ledger"), size // 2)
        self.assertIn("is damaged", self.finish(code=4).err)
        shutil.copy(self.path("case.yaml"), self.path("outputs/c.ledger"))
        self.assertIn("is not a ledger", self.finish(code=2).err)


if __name__ == "__main__":
    unittest.main()
