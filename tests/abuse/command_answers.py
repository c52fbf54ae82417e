"""How every verb answers: as one JSON object, as CSV, with its exit code, and when stdout fails or somebody presses Ctrl-C.

usage: /usr/bin/python3 command_answers.py LEAT_BINARY [unittest options], or LEAT in the environment.

With --json stdout holds one object and a line feed whatever happens, and the object says what the exit code says. CSV holds the
numbers of the JSON. An interrupted history is written up to where it came.
"""
import csv
import io
import json
import os
import re
import shutil
import signal
import subprocess
import tempfile
import time
import unittest

import h5py

import command_support as support

LEAT = support.binary()
STATUS = {0: "done", 1: "usage", 2: "input_faults", 3: "not_solved", 4: "machine_trouble", 5: "own_bug"}
KEYS = {"program", "verb", "file", "title", "status", "exit_code", "lines", "tables", "cautions", "faults", "remarks", "failure", "written",
        "closing"}
RUN = os.path.join(support.FLOWSHEETS, "1_ammine_residue.yaml")
BEAKER = os.path.join(support.FLOWSHEETS, "beaker_silver_ammonia.yaml")
FAULTY = os.path.join(support.HERE, "bad_inputs", "six_faults.yaml")
UNSOLVABLE = os.path.join(support.HERE, "bad_inputs", "unsolvable_thickener.yaml")
TABLES = {"check": {"units", "lots", "constants"}, "constants": {"constants", "sources", "others"},
          "run": {"streams", "stages", "recovery", "metals", "reagents", "history", "closure"},
          "speciate": {"steps", "dissolved", "holders", "saturation", "closure"}, "ladder": {"ladder", "distribution", "failures"}}
GOOD = [("check", RUN), ("run", RUN), ("speciate", BEAKER), ("constants", "Ag(NH3)"),
        ("ladder", BEAKER, "--vary", "beaker.liquor.NH3: 2 mol/L to 4 mol/L in 2 points")]
VERBS = ["check", "run", "speciate", "ladder", "campaign", "report"]  # those that take a file


def no_constant(text):
    raise ValueError(f"{text} is no JSON")


class InEmptyFolder(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.mkdtemp(prefix="leat_answers_")
        self.addCleanup(shutil.rmtree, self.folder, True)

    def leat(self, *words, before=None):
        return support.run([LEAT, *words], self.folder, seconds=120, before=before)

    def answer(self, code, *words):
        """The one object on stdout of a command that ends with this code."""
        done = self.leat(*words, "--json")
        self.assertEqual(done.code, code, done.err)
        self.assertTrue(done.out.endswith("}\n") and done.out.count("\n") == 1, "one object and a line feed")
        told = json.loads(done.out, parse_constant=no_constant)
        self.assertEqual(set(told), KEYS)
        self.assertEqual((told["exit_code"], told["status"]), (code, STATUS[code]))
        self.assertEqual(bool(told["failure"] or told["faults"]), code != 0, told["failure"])
        self.assertEqual(bool(done.err), code != 0, f"people are told on stderr too: {done.err}")
        for table in told["tables"].values():
            self.assertEqual(set(table), {"heading", "columns", "rows", "note"})
            for row in table["rows"]:
                self.assertEqual(len(row), len(table["columns"]))
        return told


class Json(InEmptyFolder):
    def test_done(self):
        for verb, *what in GOOD:
            with self.subTest(verb=verb):
                told = self.answer(0, verb, *what)
                self.assertEqual(told["verb"], verb)
                self.assertEqual(set(told["tables"]), TABLES[verb])
                for path in told["written"].values():
                    self.assertTrue(os.path.exists(os.path.join(self.folder, path)))
                if verb in ("run", "speciate", "ladder"):
                    self.assertIn("results", told["written"])
                    self.assertIn("estimates only", told["cautions"][-1])

    def test_a_beaker_may_be_run(self):
        self.assertEqual(set(self.answer(0, "run", BEAKER)["tables"]), TABLES["speciate"])
        self.assertEqual(set(self.answer(0, "check", BEAKER)["tables"]), {"constants"})

    def test_numbers_are_those_of_the_file(self):
        told = self.answer(0, "run", RUN)
        recovery = told["tables"]["recovery"]
        column = [one["name"] for one in recovery["columns"]].index("recovery")
        with h5py.File(os.path.join(self.folder, told["written"]["results"])) as file:
            elements = [one.decode() for one in file["element"][()]]
            for row in recovery["rows"]:
                self.assertEqual(row[column], 100 * file["steady_recovery"][elements.index(row[0])])
            self.assertEqual(len(told["tables"]["history"]["rows"]), len(file["time"]))

    def test_usage(self):
        for words in (["run"], ["walk"], [], ["run", RUN, "--ot", "x"], ["run", RUN, "more"], ["constants", "a", "b"], ["run", RUN, "--csv", "streams"]):
            with self.subTest(words=words):
                told = self.answer(1, *words)
                self.assertEqual(told["verb"], words[0] if words and words[0] != "walk" else "")
                self.assertEqual(support.files_under(self.folder), [])

    def test_help_and_version(self):
        self.assertIn("Usage", "\n".join(self.answer(0, "--help")["lines"]))
        self.assertIn("--out", "\n".join(self.answer(0, "run", "--help")["lines"]))
        self.assertEqual(len(self.answer(0, "--version")["lines"]), 1)

    def test_faults_have_their_places(self):
        for verb in ("check", "run"):
            with self.subTest(verb=verb):
                faults = self.answer(2, verb, FAULTY)["faults"]
                told = self.leat(verb, FAULTY).err.splitlines()[:-1]
                self.assertGreaterEqual(len(faults), 6)
                lines = [f"{one['file']}:{one['line']}:{one['column']} {one['key']}: {one['message']}" for one in faults]
                self.assertEqual(lines, told)
                self.assertTrue(all(re.fullmatch(r"[a-z_]+", one["code"]) for one in faults))
                self.assertEqual(support.files_under(self.folder), [])

    def test_files_that_are_not_there(self):
        for verb in VERBS:
            with self.subTest(verb=verb):
                told = self.answer(2, verb, "nowhere.yaml")
                self.assertEqual((told["verb"], told["file"]), (verb, "nowhere.yaml"))
                self.assertEqual(support.files_under(self.folder), [])

    def test_a_name_that_is_no_text(self):
        done = support.run([LEAT.encode(), b"run", b"caf\xe9.yaml", b"--json"], self.folder)
        self.assertEqual(done.code, 2)
        self.assertEqual(json.loads(done.out)["file"], "caf\ufffd.yaml")

    def test_nothing_found(self):
        self.assertIn("did you mean", self.answer(2, "constants", "chlorargyrit_")["failure"])

    def test_the_other_kind(self):
        self.assertIn("leat run", self.answer(2, "speciate", RUN)["failure"])

    def test_not_solved(self):
        told = self.answer(3, "run", UNSOLVABLE)
        self.assertEqual((told["tables"], told["written"]), ({}, {}))
        self.assertEqual(support.files_under(self.folder), [])

    def test_machine_trouble(self):
        for verb, *what in GOOD[1:3] + GOOD[4:]:
            with self.subTest(verb=verb):
                told = self.answer(4, verb, *what, "--out", "/dev/full")
                self.assertIn("not written", told["failure"])
                self.assertEqual((told["tables"], told["written"]), ({}, {}), "what is not written is not shown")


def rows_of(text):
    return list(csv.reader(io.StringIO(text, newline="")))


def cell_of(value):
    """A JSON cell as it stands in CSV, numbers as numbers."""
    return "" if value is None else value


def read_cell(text, like):
    return float(text) if isinstance(like, (int, float)) and text else text


class Csv(InEmptyFolder):
    def compare(self, rows, table, name):
        self.assertEqual(rows[0], [one["name"] + (f" [{one['unit']}]" if one["unit"] else "") for one in table["columns"]], name)
        self.assertEqual(len(rows) - 1, len(table["rows"]), name)
        for row, expected in zip(rows[1:], table["rows"]):
            self.assertEqual([read_cell(cell, like) for cell, like in zip(row, expected)], [cell_of(one) for one in expected], name)

    def test_each_table_is_that_of_the_json(self):
        for verb, *what in GOOD:
            tables = json.loads(self.leat(verb, *what, "--json").out)["tables"]
            for name, table in tables.items():
                with self.subTest(verb=verb, table=name):
                    done = self.leat(verb, *what, "--csv", name)
                    self.assertEqual(done.code, 0, done.err)
                    self.compare(rows_of(self.raw(verb, *what, "--csv", name)), table, name)

    def raw(self, *words):
        """stdout with its line ends, as RFC 4180 wants them."""
        text = subprocess.run([LEAT, *words], cwd=self.folder, capture_output=True, timeout=120, check=True).stdout.decode()
        self.assertEqual(text.count("\n"), text.count("\r\n"))
        return text

    def test_all_tables(self):
        for verb, *what in GOOD:
            with self.subTest(verb=verb):
                tables = json.loads(self.leat(verb, *what, "--json").out)["tables"]
                parts = re.split(r"(?:^|\r\n)# (\w+): (.*)\r\n", self.raw(verb, *what, "--csv", "all"))
                self.assertEqual(parts[1::3], list(tables))
                self.assertEqual(parts[2::3], [one["heading"] for one in tables.values()])
                for name, text in zip(parts[1::3], parts[3::3]):
                    self.compare(rows_of(text), tables[name], name)

    def test_names_that_are_none(self):
        for verb, *what in GOOD:
            with self.subTest(verb=verb):
                name = sorted(TABLES[verb])[-1]
                done = self.leat(verb, *what, "--csv", name + "x")
                self.assertEqual((done.code, done.out), (1, ""))
                self.assertIn(f"did you mean '{name}'?", done.err)
                for one in TABLES[verb]:
                    self.assertIn(one, done.err)
                self.assertEqual(support.files_under(self.folder), [], "told before anything is solved")

    def test_not_with_json(self):
        done = self.leat("run", RUN, "--csv", "streams", "--json")
        self.assertEqual(done.code, 1)
        self.assertIn("excludes", done.err)

    def test_a_table_without_rows_has_its_head(self):
        text = support.read_text(RUN)
        with open(os.path.join(self.folder, "steady.yaml"), "w", encoding="utf-8") as file:
            file.write(text[:text.index("\nhistory:")] + "\n")
        done = self.leat("run", "steady.yaml", "--csv", "history")
        self.assertEqual(done.code, 0, done.err)
        self.assertEqual(len(rows_of(done.out)), 1)
        self.assertNotIn("Through time", self.leat("run", "steady.yaml").out)

    def test_failures_leave_stdout_empty(self):
        for code, what in ((2, FAULTY), (3, UNSOLVABLE)):
            with self.subTest(code=code):
                done = self.leat("run", what, "--csv", "streams")
                self.assertEqual((done.code, done.out), (code, ""))

    def test_cautions_stay_on_stderr(self):
        self.assertIn("caution: ammonia vapour", self.leat("run", BEAKER, "--csv", "steps").err)


class Text(InEmptyFolder):
    def test_long_histories_are_thinned(self):
        out = self.leat("run", RUN).out
        self.assertRegex(out, r"Through time \(13 of 49 rows\)")
        part = out[out.index("Through time"):out.index("Closure")].strip().splitlines()
        self.assertEqual(len(part), 4 + 13)
        self.assertEqual([part[4].split()[0], part[-1].split()[0]], ["0", "48.00"])

    def test_what_was_written_is_said(self):
        self.assertIn("Written to here.h5 (HDF5", self.leat("run", BEAKER, "--out", "here.h5").out)


class Stdout(InEmptyFolder):
    MANNERS = ([], ["--json"], ["--csv", "all"])

    def with_stdout(self, stdout, *words, **more):
        return subprocess.run([LEAT, *words], cwd=self.folder, stdout=stdout, stderr=subprocess.PIPE, timeout=120, check=False, **more)

    def test_full(self):
        for words in (["run", RUN], ["check", RUN], ["constants"], ["speciate", BEAKER], ["--help"], ["--version"]):
            for manner in self.MANNERS if words[0][0] != "-" else self.MANNERS[:1]:
                with self.subTest(words=words, manner=manner), open("/dev/full", "w", encoding="utf-8") as full:
                    done = self.with_stdout(full, *words, *manner)
                    self.assertEqual(done.returncode, 4, done.stderr.decode())
                    self.assertIn(b"stdout: not written", done.stderr)

    def test_closed(self):
        """Nothing that is opened later takes the place of a closed stdout."""
        for manner in self.MANNERS:
            with self.subTest(manner=manner):
                done = self.with_stdout(None, "run", BEAKER, "--out", "closed.h5", *manner, preexec_fn=lambda: os.close(1))
                self.assertEqual(done.returncode, 4, done.stderr.decode())
                support.open_whole(os.path.join(self.folder, "closed.h5"))

    def test_all_closed(self):
        closed = subprocess.run([LEAT, "run", BEAKER, "--out", "closed.h5"], cwd=self.folder, timeout=120, check=False,
                                preexec_fn=lambda: [os.close(stream) for stream in (0, 1, 2)])
        self.assertEqual(closed.returncode, 4)
        support.open_whole(os.path.join(self.folder, "closed.h5"))

    def test_stderr_that_is_full(self):
        """Then people are not told; all else goes on."""
        for code, words in ((0, ["run", BEAKER, "--csv", "steps"]), (1, ["walk"]), (2, ["run", FAULTY]), (4, ["run", BEAKER, "--out", "/dev/full"])):
            with self.subTest(words=words), open("/dev/full", "w", encoding="utf-8") as full:
                done = subprocess.run([LEAT, *words], cwd=self.folder, stdout=subprocess.DEVNULL, stderr=full, timeout=120, check=False)
                self.assertEqual(done.returncode, code)

    def test_a_reader_that_goes_away(self):
        for words in (["constants"], ["constants", "--json"], ["run", RUN, "--csv", "all"]):
            with self.subTest(words=words):
                read, write = os.pipe()
                os.close(read)
                try:
                    done = self.with_stdout(write, *words)
                finally:
                    os.close(write)
                self.assertEqual(done.returncode, 0)
                self.assertNotIn(b"stdout", done.stderr)

    def test_progress_is_for_terminals(self):
        self.assertNotIn("through time ", self.leat("run", RUN).err)


class Interrupted(InEmptyFolder):
    """Ctrl-C while a long history runs: it stops at the next stored time, and what is there is written and said."""

    def setUp(self):
        super().setUp()
        text = support.read_text(os.path.join(support.FLOWSHEETS, "2_cyano_ore.yaml"))
        text = re.sub(r"^  every: .*$", "  every: 1 h", text, flags=re.M)
        text = re.sub(r"^  until: .*$", "  until: 20000 h", text, flags=re.M)
        with open(os.path.join(self.folder, "long.yaml"), "w", encoding="utf-8") as file:
            file.write(text)

    def start(self, *words):
        run = subprocess.Popen([LEAT, "run", "long.yaml", "--out", "long.h5", *words], cwd=self.folder, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
        self.addCleanup(run.kill)
        time.sleep(2)  # the steady state takes less
        return run

    def stopped(self, number, *words):
        run = self.start(*words)
        run.send_signal(number)
        out, err = run.communicate(timeout=60)
        self.assertEqual(run.returncode, 4, err.decode())
        return out.decode(), err.decode()

    def hours(self):
        with h5py.File(os.path.join(self.folder, "long.h5")) as file:
            self.assertIn("stopped at", file["failure"][()].decode())
            times = file["time"][()]
            self.assertEqual(len(file["recovery"]), len(times))
        self.assertEqual(list(times), list(range(len(times))))
        self.assertGreater(len(times), 1)
        self.assertLess(len(times), 20001)
        return len(times) - 1

    def test_both_signals(self):
        for number in (signal.SIGINT, signal.SIGTERM):
            with self.subTest(signal=number):
                out, err = self.stopped(number)
                hours = self.hours()
                for told in (out, err):
                    self.assertIn(f"stopped at {hours} h of 20000 h", told)
                self.assertIn("Streams at steady state", out)
                self.assertIn("Through time", out)
                self.assertIn("Written to long.h5", out)

    def test_as_json(self):
        out, _ = self.stopped(signal.SIGINT, "--json")
        told = json.loads(out)
        hours = self.hours()
        self.assertEqual((told["exit_code"], told["status"]), (4, "machine_trouble"))
        self.assertEqual(told["failure"], f"stopped at {hours} h of 20000 h")
        self.assertEqual(len(told["tables"]["history"]["rows"]), hours + 1)
        self.assertEqual(told["written"], {"results": "long.h5"})

    def test_the_second_one_ends_at_once(self):
        run = self.start()
        run.send_signal(signal.SIGINT)
        run.send_signal(signal.SIGTERM)
        run.communicate(timeout=60)
        self.assertIn(run.returncode, (4, -signal.SIGTERM))  # 4: it was done before the second came
        left = [name for name in support.files_under(self.folder) if name not in ("long.yaml", "long.h5")]
        self.assertTrue(all(name.startswith("long.h5.partial-") for name in left), left)

    def test_ignored_stays_ignored(self):
        """As under nohup: who started the program without Ctrl-C does not get it."""
        text = support.read_text(os.path.join(self.folder, "long.yaml"))
        with open(os.path.join(self.folder, "long.yaml"), "w", encoding="utf-8") as file:
            file.write(text.replace("20000 h", "400 h"))
        run = subprocess.Popen([LEAT, "run", "long.yaml"], cwd=self.folder, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL,
                               preexec_fn=lambda: signal.signal(signal.SIGINT, signal.SIG_IGN))
        self.addCleanup(run.kill)
        time.sleep(0.5)
        run.send_signal(signal.SIGINT)
        self.assertEqual(run.wait(timeout=120), 0)


if __name__ == "__main__":
    unittest.main()
