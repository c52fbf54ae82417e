"""Bad input as people make it: each file of bad_inputs is refused with its place and a word that helps, and nothing is written.

usage: /usr/bin/python3 command_refusals.py LEAT_BINARY [unittest options], or LEAT in the environment.

The first comment lines of a file say what to expect:
  # expect-line: N [N ...]   the line of the fault; left out where the faults stand in several lines
  # expect: piece            a piece of text, exactly as it stands on stderr in a line with FILE:LINE:COLUMN; may be repeated
  # expect-exit: 3           the file is in order but cannot be solved: check is content, run ends with 3 and this text
"""
import collections
import os
import re
import shutil
import subprocess
import tempfile
import time
import unittest

import command_support as support

LEAT = support.binary()
BAD_INPUTS = os.path.join(support.HERE, "bad_inputs")
LONGEST = 5  # of a refusal [s]
EXAMPLE = os.path.join(BAD_INPUTS, "six_faults.yaml")  # where any file will do
NOBODY = 65534


class Expectation:
    """What the head of a bad input says."""

    def __init__(self, path):
        head = re.match(r"(#.*\n)*", support.read_text(path)).group()
        self.lines = [int(n) for words in re.findall(r"^# expect-line: (.*)$", head, re.M) for n in words.split()]
        self.pieces = re.findall(r"^# expect: (.*)$", head, re.M)
        codes = re.findall(r"^# expect-exit: (\d+)$", head, re.M)
        self.code = int(codes[0]) if codes else 2
        assert self.pieces, f"{path}: expects nothing"
        assert self.lines or codes or len(self.pieces) >= 6, f"{path}: says no line"


def bad_inputs(code):
    names = sorted(name for name in os.listdir(BAD_INPUTS) if name.endswith(".yaml"))
    listed = [(name, Expectation(os.path.join(BAD_INPUTS, name))) for name in names]
    return [(name, expected) for name, expected in listed if expected.code == code]


def missing_pieces(name, expected, err):
    """Pieces that no line of stderr carries together with the place."""
    def tells(line, piece):
        place = re.search(re.escape(name) + r":(\d+):(\d+)", line)
        return place and piece in line and (not expected.lines or int(place.group(1)) in expected.lines)
    return [piece for piece in expected.pieces if not any(tells(line, piece) for line in err.splitlines())]


class InEmptyFolder(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.mkdtemp(prefix="leat_refusals_")
        self.addCleanup(shutil.rmtree, self.folder, True)

    def sweep(self):
        for name in os.listdir(self.folder):
            path = os.path.join(self.folder, name)
            shutil.rmtree(path) if os.path.isdir(path) else os.remove(path)

    def leat(self, *words, before=None):
        """Runs the command here and asserts that it neither crashed nor took long."""
        start = time.monotonic()
        done = support.run([LEAT, *words], self.folder, seconds=60, before=before)
        self.assertGreaterEqual(done.code, 0, f"{words}: ended by signal {-done.code}\n{done.err}")
        self.assertLess(time.monotonic() - start, LONGEST, f"{words}: took too long")
        return done

    def assert_nothing_written(self, but=()):
        self.assertEqual([name for name in support.files_under(self.folder) if name not in but], [])


class BadInputs(InEmptyFolder):
    def test_there_are_enough(self):
        self.assertGreaterEqual(len(bad_inputs(2)), 45)

    def test_each_is_refused_with_its_place(self):
        for name, expected in bad_inputs(2):
            for verb in ("check", "run"):
                self.sweep()
                with self.subTest(file=name, verb=verb):
                    done = self.leat(verb, os.path.join(BAD_INPUTS, name))
                    self.assertEqual(done.code, 2, done.err or done.out[:200])
                    missing = missing_pieces(name, expected, done.err)
                    self.assertEqual(missing, [], f"not told in line {expected.lines}:\n{done.err}")
                    self.assertEqual(done.out, "", "a refused file prints nothing on stdout")
                    self.assert_nothing_written()

    def test_no_fault_is_told_twice(self):
        for name, _ in bad_inputs(2):
            with self.subTest(file=name):
                told = self.leat("run", os.path.join(BAD_INPUTS, name)).err.splitlines()
                self.assertEqual([line for line, times in collections.Counter(told).items() if times > 1], [])

    def test_the_last_line_counts_the_faults(self):
        for name, _ in bad_inputs(2):
            with self.subTest(file=name):
                told = self.leat("check", os.path.join(BAD_INPUTS, name)).err.splitlines() or [""]
                count = re.search(r": (\d+) faults?; nothing was calculated or written$", told[-1])
                self.assertTrue(count, told[-1])
                self.assertEqual(int(count.group(1)), len(told) - 1)

    def test_what_cannot_be_solved_ends_with_3(self):
        for name, expected in bad_inputs(3):
            self.sweep()
            with self.subTest(file=name):
                path = os.path.join(BAD_INPUTS, name)
                self.assertEqual(self.leat("check", path).code, 0)
                done = self.leat("run", path)
                self.assertEqual(done.code, 3, done.err)
                for piece in expected.pieces:
                    self.assertIn(piece, done.err)
                self.assertEqual(done.out, "", "a result that does not close is never printed")
                self.assert_nothing_written()


class FilesThatAreNone(InEmptyFolder):
    def refused(self, path, *pieces):
        for verb in ("check", "run", "speciate"):
            with self.subTest(verb=verb):
                done = self.leat(verb, path)
                self.assertEqual(done.code, 2, done.err)
                for piece in (os.path.basename(path), *pieces):
                    self.assertIn(piece, done.err)
                self.assert_nothing_written(but=[os.path.basename(path)])

    def written(self, name, content):
        with open(os.path.join(self.folder, name), "wb") as file:
            file.write(content)
        return name

    def test_missing(self):
        self.refused("nowhere.yaml", "cannot be read")

    def test_folder(self):
        os.mkdir(os.path.join(self.folder, "folder.yaml"))
        self.refused("folder.yaml", "folder")

    def test_empty(self):
        self.refused(self.written("empty.yaml", b""), ":1:1", "holds nothing")

    def test_comments_alone(self):
        self.refused(self.written("comments.yaml", b"# a plan\n# for later\n"), "holds nothing")

    def test_binary(self):
        self.refused(self.written("image.yaml", b"\x89PNG\r\n\x1a\n" + bytes(range(256)) * 40), ":1:1")

    def test_results_file(self):
        self.refused(self.written("results.yaml", b"\x89HDF\r\n\x1a\n" + bytes(2000)), "leat report")

    def test_utf16(self):
        self.refused(self.written("wide.yaml", "leat: 1\nkind: flowsheet\n".encode("utf-16")))

    def test_latin1(self):
        self.refused(self.written("latin.yaml", b"leat: 1\nkind: flowsheet\ntitle: 25 \xb0C\n"), ":3:")

    def test_list_at_the_top(self):
        self.refused(self.written("list.yaml", b"- leat: 1\n- kind: flowsheet\n"), ":1:1")

    def test_single_text(self):
        self.refused(self.written("text.yaml", b"leat:1\n"), ":1:1")

    def test_deep_nesting(self):
        self.refused(self.written("deep.yaml", b"leat: " + b"[" * 100000 + b"\n"), ":1:")

    def test_one_very_long_line(self):
        self.refused(self.written("long.yaml", b"leat: 1\nkind: beaker\ntitle: " + b"x" * 5000000 + b"\n"), ":1:1", "beaker")


class Usage(InEmptyFolder):
    def test_wrong_words_end_with_1(self):
        for words in ([], ["walk"], ["run"], ["check"], ["speciate"], ["run", EXAMPLE, "--ot", "x.h5"], ["run", EXAMPLE, "--out"],
                      ["run", EXAMPLE, "more.yaml"], ["check", EXAMPLE, "--out", "x.h5"], ["--verbose"], ["constants", "Ag", "Cu"]):
            with self.subTest(words=words):
                done = self.leat(*words)
                self.assertEqual(done.code, 1, done.err)
                self.assertNotEqual(done.err, "")
                self.assert_nothing_written()

    def test_help_and_version_end_with_0(self):
        for words in (["--help"], ["run", "--help"], ["--version"], ["constants", "Ag(NH3)"]):
            with self.subTest(words=words):
                done = self.leat(*words)
                self.assertEqual(done.code, 0, done.err)
                self.assertNotEqual(done.out, "")

    def test_a_verb_for_the_other_kind_of_file(self):
        done = self.leat("speciate", os.path.join(support.FLOWSHEETS, "1_ammine_residue.yaml"))
        self.assertEqual(done.code, 2, done.err)
        self.assertIn("leat run", done.err)
        self.assert_nothing_written()


class OutputThatCannotBeWritten(InEmptyFolder):
    """A beaker takes milliseconds and writes like a run."""
    beaker = os.path.join(support.FLOWSHEETS, "beaker_silver_ammonia.yaml")

    def assert_machine_trouble(self, *words, but=(), before=None):
        done = self.leat("run", self.beaker, *words, before=before)
        self.assertEqual(done.code, 4, done.err)
        self.assertIn("not written", done.err)
        self.assert_nothing_written(but=but)

    def make_file(self, name):
        with open(os.path.join(self.folder, name), "w", encoding="utf-8") as file:
            file.write("mine\n")

    def test_path_under_a_file(self):
        self.make_file("plain")
        self.assert_machine_trouble("--out", "plain/results.h5", but=["plain"])
        self.assertEqual(support.read_text(os.path.join(self.folder, "plain")), "mine\n")

    def test_default_folder_is_a_file(self):
        self.make_file("outputs")
        self.assert_machine_trouble(but=["outputs"])
        self.assertEqual(support.read_text(os.path.join(self.folder, "outputs")), "mine\n")

    def test_name_of_a_folder(self):
        os.mkdir(os.path.join(self.folder, "here.h5"))
        self.assert_machine_trouble("--out", "here.h5", but=["here.h5"])

    def test_device(self):
        self.assert_machine_trouble("--out", "/dev/full")

    def test_name_too_long(self):
        self.assert_machine_trouble("--out", "x" * 300 + ".h5")

    def test_folder_without_permission(self):
        if os.geteuid() != 0:
            os.chmod(self.folder, 0o555)
            self.addCleanup(os.chmod, self.folder, 0o755)
            return self.assert_machine_trouble("--out", "results.h5")
        reachable = lambda: os.setuid(NOBODY)  # root may write anywhere: run as somebody who may not
        os.chmod(self.folder, 0o755)
        try:
            support.run([LEAT, "--version"], self.folder, before=reachable)
        except (OSError, subprocess.SubprocessError):
            self.skipTest("the binary cannot be run by another user")
        return self.assert_machine_trouble("--out", "results.h5", before=reachable)

    def test_file_larger_than_allowed(self):
        import resource
        small = lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (4096, 4096))
        self.assert_machine_trouble("--out", "results.h5", before=small)

    def test_stdout_that_is_full(self):
        with open("/dev/full", "w", encoding="utf-8") as full:
            done = subprocess.run([LEAT, "run", self.beaker, "--out", "results.h5"], cwd=self.folder, stdout=full, stderr=subprocess.PIPE,
                                  timeout=60)
        self.assertEqual(done.returncode, 4, done.stderr.decode())

    def test_earlier_results_stay(self):
        path = os.path.join(self.folder, "results.h5")
        self.assertEqual(self.leat("run", self.beaker, "--out", "results.h5").code, 0)
        with open(path, "rb") as file:
            before = file.read()
        done = self.leat("run", EXAMPLE, "--out", "results.h5")
        self.assertEqual(done.code, 2)
        with open(path, "rb") as file:
            self.assertEqual(file.read(), before)


class NotRefused(InEmptyFolder):
    """What looks odd and is in order."""

    def accepted(self, *edits):
        text = support.read_text(os.path.join(BAD_INPUTS, "unsolvable_thickener.yaml"))
        for old, new in edits:
            self.assertEqual(text.count(old), 1, old)
            text = text.replace(old, new)
        with open(os.path.join(self.folder, "odd.yaml"), "w", encoding="utf-8", newline="") as file:
            file.write(text)
        done = self.leat("check", "odd.yaml")
        self.assertEqual(done.code, 0, done.err)

    def test_the_end_of_a_range(self):
        self.accepted(("solids_fraction: 20 %", "solids_fraction: 95 %"))

    def test_lines_from_another_system(self):
        self.accepted(("\nkind: flowsheet\n", "\r\nkind: flowsheet\r\n"))

    def test_quoted_values_and_units_apart(self):
        self.accepted(("volume: 4 m3", "volume: '4 m3'"), ("rate: 20 kg/h", 'rate: "20 kg/h"'))

    def test_other_units_of_the_same_kind(self):
        self.accepted(("volume: 4 m3", "volume: 4000 L"), ("temperature: 30 degC", "temperature: 303.15 K"))


if __name__ == "__main__":
    unittest.main()
