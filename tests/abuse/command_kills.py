"""The command under blows: killed and interrupted at random moments, and fed with damaged copies of the examples.

usage: /usr/bin/python3 command_kills.py LEAT_BINARY [unittest options], or LEAT in the environment.

A results name stands for a whole file or for none, whenever the program ends. Damaged text is read, refused or not
solved: no crash, no long wait, and nothing written unless the command says that all is well.
"""
import glob
import os
import random
import re
import shutil
import signal
import subprocess
import tempfile
import time
import unittest

import command_support as support

LEAT = support.binary()
BLOWS = 14      # of each signal
DAMAGED = 150   # copies of the examples
LONGEST = 10    # of a run of a damaged copy [s]
SEED = 20814    # any number; the same one always, so that a fault can be met again


class InEmptyFolder(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.mkdtemp(prefix="leat_kills_")
        self.addCleanup(shutil.rmtree, self.folder, True)

    def path(self, name):
        return os.path.join(self.folder, name)

    def write(self, name, text):
        with open(self.path(name), "wb") as file:
            file.write(text)
        return name


class Killed(InEmptyFolder):
    """A run with a history stored often, so that the writing of it is a good part of the time."""

    def setUp(self):
        super().setUp()
        text = support.read_text(os.path.join(support.FLOWSHEETS, "1_ammine_residue.yaml"))
        text = re.sub(r"^  every: .*$", "  every: 3 min", text, flags=re.M)
        text = re.sub(r"^  until: .*$", "  until: 16 h", text, flags=re.M)
        self.write("case.yaml", text.encode())
        start = time.monotonic()
        done = support.run([LEAT, "run", "case.yaml", "--out", "whole.h5"], self.folder, seconds=120)
        self.assertEqual(done.code, 0, done.err)
        self.length = time.monotonic() - start
        self.items = support.open_whole(self.path("whole.h5"))

    def strike(self, blow, moment, out):
        """Starts a run, strikes after so many seconds; returns how it ended."""
        run = subprocess.Popen([LEAT, "run", "case.yaml", "--out", out], cwd=self.folder, stdout=subprocess.DEVNULL, stderr=subprocess.PIPE)
        try:
            run.wait(timeout=moment)
        except subprocess.TimeoutExpired:
            run.send_signal(blow)
        _, told = run.communicate(timeout=60)
        return run.returncode, told.decode("utf-8", "replace")

    def moments(self, seed):
        """Over the whole run and a little beyond; every third one in the last tenth, where the file is written."""
        chance = random.Random(seed)
        return [self.length * (chance.uniform(0.85, 1.05) if k % 3 == 2 else chance.uniform(0, 1.05)) for k in range(BLOWS)]

    def none_or_whole(self, blow, allowed):
        ends = set()
        for k, moment in enumerate(self.moments(SEED + blow)):
            with self.subTest(blow=k, moment=round(moment, 3)):
                out = "results.h5"
                earlier = k % 2 == 1
                if os.path.exists(self.path(out)):
                    os.remove(self.path(out))
                if earlier:
                    shutil.copy(self.path("whole.h5"), self.path(out))
                code, told = self.strike(blow, moment, out)
                ends.add(code)
                self.assertIn(code, allowed, told)
                if code == 0 or earlier:
                    self.assertTrue(os.path.exists(self.path(out)), "an earlier file is gone, or none is there after a run that went well")
                if os.path.exists(self.path(out)):
                    self.assertEqual(support.open_whole(self.path(out)), self.items)
                left = set(support.files_under(self.folder)) - {"case.yaml", "whole.h5", out}
                for name in left:  # a temporary may stay, under its own name and no other
                    os.remove(self.path(name))
                    self.assertTrue(re.fullmatch(r"results\.h5\.partial-[0-9a-f]{16}", name), f"left behind: {name}")
        self.assertTrue(ends - {0}, "no blow struck before the end: the run is too short for this test")

    def test_kill(self):
        self.none_or_whole(signal.SIGKILL, {0, -signal.SIGKILL})

    def test_interrupt(self):
        self.none_or_whole(signal.SIGINT, {0, 4, -signal.SIGINT})

    def test_terminate(self):
        self.none_or_whole(signal.SIGTERM, {0, 4, -signal.SIGTERM})


SIGNS = "{}[]:,'\"#&*!|>%@`?-+=^()\t\n\r 0123456789\x00\x7f\u00e9\u2212"
NUMBERS = ["0", "-1", "1e30", "1e-30", "nan", "inf", "1e999", "007", "0x10", "1_000", "1,5", "99999999999999999999", "-0", ".5", "5."]
UNITS = ["h", "m3", "kg", "t/h", "m3/h", "mol/L", "g/L", "%", "degC", "K", "1/h", "kJ/mol", "M", "", "ton", "mg/L as NaCN", "rest"]


class Damage:
    """One small change of a text, of the kinds a hand, an editor or a bad disk make."""

    def __init__(self, seed):
        self.chance = random.Random(seed)
        self.ways = [self.byte, self.insert, self.cut_out, self.cut_off, self.drop_line, self.double_line, self.swap_lines, self.number,
                     self.unit, self.word, self.indent, self.drop_line, self.number, self.unit, self.word]

    def __call__(self, text):
        for _ in range(self.chance.choice([1, 1, 1, 2, 4])):
            text = self.chance.choice(self.ways)(text)
        return text

    def place(self, text):
        return self.chance.randrange(len(text) + 1)

    def byte(self, text):
        at = self.place(text)
        return text[:at] + bytes([self.chance.randrange(256)]) + text[at + 1:]

    def insert(self, text):
        at = self.place(text)
        return text[:at] + self.chance.choice(SIGNS).encode() + text[at:]

    def cut_out(self, text):
        at = self.place(text)
        return text[:at] + text[at + self.chance.randrange(1, 40):]

    def cut_off(self, text):
        return text[:self.place(text)]

    def lines(self, text):
        lines = text.split(b"\n")
        return lines, self.chance.randrange(len(lines)), self.chance.randrange(len(lines))

    def drop_line(self, text):
        lines, a, _ = self.lines(text)
        return b"\n".join(lines[:a] + lines[a + 1:])

    def double_line(self, text):
        lines, a, b = self.lines(text)
        return b"\n".join(lines[:b] + [lines[a]] + lines[b:])

    def swap_lines(self, text):
        lines, a, b = self.lines(text)
        lines[a], lines[b] = lines[b], lines[a]
        return b"\n".join(lines)

    def indent(self, text):
        lines, a, _ = self.lines(text)
        lines[a] = lines[a].lstrip(b" ") if self.chance.random() < 0.5 else b"  " + lines[a]
        return b"\n".join(lines)

    def exchange(self, text, pattern, by):
        found = list(re.finditer(pattern, text))
        if not found:
            return text
        one = self.chance.choice(found)
        return text[:one.start()] + by(found) + text[one.end():]

    def number(self, text):
        return self.exchange(text, rb"(?<=[ :])-?\d+(\.\d+)?(?= )", lambda _: self.chance.choice(NUMBERS).encode())

    def unit(self, text):
        return self.exchange(text, rb"(?<=\d )[A-Za-z%][\w/%]*", lambda _: self.chance.choice(UNITS).encode())

    def word(self, text):
        return self.exchange(text, rb"[A-Za-z_][\w()^+]*", lambda found: self.chance.choice(found).group())


class Damaged(InEmptyFolder):
    def examples(self):
        """The examples with short histories: what takes long by what it asks for is no fault."""
        for path in sorted(glob.glob(os.path.join(support.FLOWSHEETS, "*.yaml"))):
            text = re.sub(r"^  until: .*$", "  until: 4 h", support.read_text(path), flags=re.M)
            yield os.path.basename(path), re.sub(r"^  every: .*$", "  every: 2 h", text, flags=re.M).encode()

    def test_damaged_copies(self):
        damage = Damage(SEED)
        examples = list(self.examples())
        for k in range(DAMAGED):
            name, text = examples[k % len(examples)]
            self.one(k, name, damage(text))

    def one(self, k, name, text):
        self.write("case.yaml", text)
        out = self.path("results.h5")
        with self.subTest(copy=k, of=name):
            try:
                done = support.run([LEAT, "run", "case.yaml", "--out", "results.h5"], self.folder, seconds=LONGEST)
            except subprocess.TimeoutExpired:
                return self.keep(k, name, text, f"took more than {LONGEST} s")
            if done.code not in (0, 2, 3):
                self.keep(k, name, text, f"ended with {done.code}: {done.err[:500]}")
            if done.code == 0:
                support.open_whole(out)
            elif os.path.exists(out):
                self.keep(k, name, text, f"ended with {done.code} and wrote a file")
            if done.code == 2 and not re.search(r"^case\.yaml:\d+:\d+", done.err, re.M):
                self.keep(k, name, text, f"refused without a place: {done.err[:500]}")
            if done.code == 3 and len(done.err) < 20:
                self.keep(k, name, text, "not solved, and not a word why")
            self.assertEqual([left for left in support.files_under(self.folder) if left not in ("case.yaml", "results.h5")], [])
        if os.path.exists(out):
            os.remove(out)
        return None

    def keep(self, k, name, text, why):
        """Keeps the damaged copy outside of the folder that is removed, and fails."""
        kept = os.path.join(tempfile.gettempdir(), f"leat_damaged_{k}_{name}")
        with open(kept, "wb") as file:
            file.write(text)
        self.fail(f"{why}\n(the copy is kept as {kept})")


if __name__ == "__main__":
    unittest.main()
