"""Bad ladders and campaigns: each file of bad_studies is refused with its place and a word that helps, and nothing is written.

usage: /usr/bin/python3 study_refusals.py LEAT_BINARY [unittest options], or LEAT in the environment.

The first comment lines of a file say what to expect:
  # expect-line: N           the line of the fault in the file itself; left out where the faults stand in several lines
  # expect-place: FILE:N     the file and line of the fault where it stands in another file
  # expect: piece            a piece of text, exactly as it stands on stderr in a line with the place; may be repeated
"""
import collections
import os
import re
import shutil
import tempfile
import unittest

import command_support as support

LEAT = support.binary()
BAD_STUDIES = os.path.join(support.HERE, "bad_studies")
BEAKER = os.path.join(BAD_STUDIES, "cases", "beaker.yaml")
CIRCUIT = os.path.join(BAD_STUDIES, "cases", "circuit.yaml")
NAMES = sorted(name for name in os.listdir(BAD_STUDIES) if name.endswith(".yaml"))


class Expectation:
    def __init__(self, name):
        text = support.read_text(os.path.join(BAD_STUDIES, name))
        head = re.match(r"(#.*\n)*", text).group()
        self.pieces = re.findall(r"^# expect: (.*)$", head, re.M)
        line, place = re.search(r"^# expect-line: (\d+)$", head, re.M), re.search(r"^# expect-place: (\S+)$", head, re.M)
        self.place = place.group(1) if place else f"{name}:{line.group(1)}" if line else f"{name}:"
        self.verb = "campaign" if re.search(r"^kind: campaign$", text, re.M) else "ladder"
        assert self.pieces, name
        assert line or place or len(self.pieces) >= 4, f"{name}: says no line"

    def missing(self, err):
        pattern = re.escape(self.place) + ("" if self.place.endswith(":") else ":")
        return [piece for piece in self.pieces if not any(re.search(pattern + r"\d+", line) and piece in line for line in err.splitlines())]


class InEmptyFolder(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.mkdtemp(prefix="leat_studies_")
        self.addCleanup(shutil.rmtree, self.folder, True)

    def refused(self, *words, code=2):
        done = support.run([LEAT, *words], self.folder, seconds=60)
        self.assertEqual(done.code, code, done.err or done.out[:300])
        self.assertEqual(done.out, "")
        self.assertEqual(support.files_under(self.folder), [])
        return done.err


class BadStudies(InEmptyFolder):
    def test_there_are_enough(self):
        self.assertGreaterEqual(len(NAMES), 60)

    def test_each_is_refused_with_its_place(self):
        for name in NAMES:
            with self.subTest(file=name):
                expected = Expectation(name)
                err = self.refused(expected.verb, os.path.join(BAD_STUDIES, name))
                self.assertEqual(expected.missing(err), [], f"not told at {expected.place}:\n{err}")
                told = err.splitlines()
                self.assertEqual([line for line, times in collections.Counter(told).items() if times > 1], [])
                self.assertRegex(told[-1], rf": {len(told) - 1} faults?; nothing was calculated or written$")

    def test_their_cases_are_in_order(self):
        for case in (BEAKER, CIRCUIT):
            self.assertEqual(support.run([LEAT, "check", case], self.folder).code, 0)

    def test_other_verbs_name_the_right_one(self):
        ladder = os.path.join(BAD_STUDIES, "cases", "ladder.yaml")
        for verb in ("run", "speciate", "check"):
            err = self.refused(verb, ladder)
            self.assertIn("leat ladder", err, verb)
        self.assertIn("leat ladder", self.refused("campaign", ladder))
        self.assertIn("leat run", self.refused("campaign", CIRCUIT))


class Sentences(InEmptyFolder):
    BAD = [  # behind --vary, a piece of what is told
        ("", "names no input"), ("beaker.liquor.NH3", "names no input"), ("beaker.liquor.NH3:", "nothing to vary"), ("beaker.liquor.NH3: 2 mol/L", "is one value"),
        ("beaker.liquor.NH4: 1 to 2 mol/L in 3 points", "did you mean 'NH3'?"), ("beaker.liquor: 1 to 2 mol/L in 3 points", "such as beaker.liquor.NH3"),
        ("beaker.liquor.NH3: 1 to 2 mol/L in 1 points", "allowed is 2"), ("beaker.liquor.NH3: 1 to 2 mol/L in x points", "whole number"), ("beaker.liquor.NH3: 1 to 2 ton in 3 points", "write t"),
        ("beaker.liquor.NH3: [1 mol/L, 2 mol/L", "not closed"), ("beaker.liquor.NH3: []", "the list is empty"), ("beaker.liquor.NH3 = 0 to 1 mol/L in 3 logarithmic points", "above 0"),
        ("steps.5.heat_to: 30 to 40 degC in 2 points", "has no '5'"), ("\udcff: 1 to 2 in 3 points", "UTF-8")]

    def test_each_is_refused(self):
        for sentence, piece in self.BAD:
            if sentence == "":
                continue  # as if there were no --vary
            with self.subTest(sentence=sentence):
                err = self.refused("ladder", BEAKER, "--vary", sentence)
                self.assertIn(piece, err)
                self.assertIn("--vary", err)

    def test_a_case_that_is_none(self):
        sentence = "beaker.liquor.NH3: 1 to 2 mol/L in 2 points"
        self.assertIn("cannot be read", self.refused("ladder", "gone.yaml", "--vary", sentence))
        self.assertIn("is a folder", self.refused("ladder", self.folder, "--vary", sentence))
        self.assertIn("is a ladder", self.refused("ladder", os.path.join(BAD_STUDIES, "cases", "ladder.yaml"), "--vary", sentence))
        self.assertIn("broken.yaml:", self.refused("ladder", os.path.join(BAD_STUDIES, "cases", "broken.yaml"), "--vary", sentence))

    def test_values_the_case_does_not_take(self):
        self.assertIn("beaker.yaml:", self.refused("ladder", BEAKER, "--vary", "beaker.liquor.NH3: 1 to 2 m3 in 2 points"))
        self.assertIn("beaker.yaml:", self.refused("ladder", BEAKER, "--vary", "beaker.temperature: -300 to -290 degC in 2 points"))


if __name__ == "__main__":
    unittest.main()
