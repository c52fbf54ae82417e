"""The documents run: every command they show, and every example with the figures its head promises.

usage: /usr/bin/python3 run_documents.py LEAT_BINARY [unittest options], or LEAT in the environment.

Commands: each line of a fenced ```sh block that begins with `leat ` or `build/release/tools/leat ` runs, as it stands, in a
temporary copy of the tree and must end with 0.

Examples: the head of each flowsheets/*.yaml has one line `# Command:  leat ...`, which must end with 0, and one or more lines
  # Expect:   recovery.Ag = 89.3 % within 0.5
  # Expect:   dissolved.Ag(I)@taken up = 0.164 mol/L within 0.002
a name of a value, the value, its unit (none for a pH) and the tolerance in the same unit. Names:
  recovery.X   extraction.X             of an element, at steady state; in a run                       [%]
  recovery.X.F                          the part of it in one family of complexes                      [%]
  recovery.X@T h   extraction.X@T h     rates at a stored time of the history                          [%]
  ph.VESSEL   ph.VESSEL@T h             at the last, or another, stored time                           [-]
  ph@STEP                               in a beaker after a step, by its name                          [-]
  dissolved.COMPONENT@STEP              all forms of it in the liquor                                  [mol/L, mol]
  free.SPECIES@STEP                     molality of one species                                        [mol/kg]
  formed.MINERAL@STEP                   solid present                                                  [g, mol]
  recovery.X@rung N   extraction.X@rung N   ph@rung N   dissolved.COMPONENT@rung N   of a ladder       [%, -, mol/L]
  recovery.X@case N   ph.VESSEL@case N      a watched value of a campaign's case                       [%, -]
"""
import glob
import os
import re
import shutil
import sqlite3
import subprocess
import sys
import tempfile
import unittest

import h5py
import numpy
import yaml

HERE = os.path.dirname(os.path.abspath(__file__))
sys.path[:0] = [os.path.join(HERE, "..", "abuse"), os.path.join(HERE, "..", "..", "tools")]
import check_sources
import command_support as support

LEAT = support.binary()
DOCUMENTS = ["README.md", "flowsheets/README.md", "models/README.md", "outputs/README.md", "DEVELOPERS.md"]
COPIED = ["CMakeLists.txt", "README.md", "DEVELOPERS.md", "flowsheets", "outputs", "models", "tools"]
OURS = ("leat ", "build/release/tools/leat ")
LONGEST = 60  # of one command [s]
EXAMPLES = sorted(glob.glob(os.path.join(support.FLOWSHEETS, "*.yaml")))


def shown_commands(path):
    """(line number, command) of each command of ours in the sh blocks of a document."""
    inside, found = False, []
    for number, line in enumerate(support.read_text(path).splitlines(), 1):
        if line.startswith("```"):
            inside = not inside and line.strip() == "```sh"
        elif inside and line.startswith(OURS):
            found.append((number, line))
    return found


class Copy:
    """A temporary copy of the tree in which `leat` and `build/release/tools/leat` are the binary under test."""

    def __init__(self):
        self.folder = tempfile.mkdtemp(prefix="leat_documents_")
        for name in COPIED:
            source, target = os.path.join(support.TREE, name), os.path.join(self.folder, name)
            if os.path.isdir(source):
                shutil.copytree(source, target, ignore=shutil.ignore_patterns("*.h5", "*.html", "*.ledger*", "*.cases", "__pycache__"))
            elif os.path.exists(source):
                shutil.copy(source, target)
        self.tools = os.path.join(self.folder, "build", "release", "tools")
        os.makedirs(self.tools)
        os.symlink(LEAT, os.path.join(self.tools, "leat"))

    def run(self, command):
        known = dict(os.environ, PATH=self.tools + os.pathsep + os.environ["PATH"])
        return subprocess.run(["sh", "-c", command], cwd=self.folder, env=known, capture_output=True, timeout=LONGEST)

    def remove(self):
        shutil.rmtree(self.folder, True)


class InACopy(unittest.TestCase):
    def setUp(self):
        self.copy = Copy()
        self.addCleanup(self.copy.remove)


class Commands(InACopy):
    def test_every_shown_command_runs(self):
        count = 0
        for document in DOCUMENTS:
            for number, command in shown_commands(os.path.join(support.TREE, document)):
                count += 1
                with self.subTest(document=document, line=number, command=command):
                    done = self.copy.run(command)
                    self.assertEqual(done.returncode, 0, done.stderr.decode("utf-8", "replace"))
        self.assertGreater(count, 0, "no document shows a command")

    def test_every_example_is_listed(self):
        listed = support.read_text(os.path.join(support.FLOWSHEETS, "README.md"))
        for path in EXAMPLES:
            self.assertIn(f"`{os.path.basename(path)}`", listed)

    def test_every_named_file_is_there(self):
        for document in DOCUMENTS:
            folder = os.path.dirname(os.path.join(support.TREE, document))
            for name in re.findall(r"`([\w./]+/[\w.]+\.(?:md|py|sh|yaml|cpp|hpp))`", support.read_text(os.path.join(support.TREE, document))):
                with self.subTest(document=document, name=name):
                    self.assertTrue(any(os.path.exists(os.path.join(place, name)) for place in (support.TREE, folder)))


# Figures ------------------------------------------------------------------------------------------------------------

EXPECTED = re.compile(r"(?P<name>\S[^=]*?)\s*=\s*(?P<value>[-+.\deE]+)(?:\s+(?P<unit>[^\s\d]\S*))?\s+within\s+(?P<tolerance>[.\deE+-]+)")
FACTORS = {("recovery", "%"): 100, ("extraction", "%"): 100, ("ph", ""): 1, ("dissolved", "mol/L"): 1e-3, ("dissolved", "mol"): 1,
           ("free", "mol/kg"): 1, ("formed", "mol"): 1, ("formed", "g"): 1}  # to the typed unit


class BadExpectation(Exception):
    pass


class Results:
    """A results file as the names of expectations see it."""

    def __init__(self, path):
        with h5py.File(path, "r") as file:
            self.data = {name: data[()] for name, data in file.items()}
            self.kind = file.attrs["leat_kind"].decode()

    def labels(self, axis):
        return [one.decode() for one in self.data[axis]]

    def index(self, axis, label):
        if label not in self.labels(axis):
            raise BadExpectation(f"'{label}' is not on the axis {axis}: {', '.join(self.labels(axis))}")
        return self.labels(axis).index(label)

    def row(self, moment):
        """Row of a step's name, or of a stored time such as `48 h`."""
        if self.kind == "beaker":
            return self.index("step_name", moment)
        if self.kind == "ladder":
            rung = re.fullmatch(r"rung (\d+)", moment)
            if not rung or not 1 <= int(rung.group(1)) <= len(self.data["rung"]):
                raise BadExpectation(f"'{moment}' is no rung of 1 to {len(self.data['rung'])}; write for example @rung 3")
            return int(rung.group(1)) - 1
        hours = re.fullmatch(r"([.\d]+) h", moment)
        near = numpy.flatnonzero(numpy.isclose(self.data["time"], float(hours.group(1)))) if hours else []
        if len(near) == 0:
            raise BadExpectation(f"'{moment}' is not a stored time such as 48 h")
        return near[0]

    def value(self, name, unit):
        what, _, moment = name.partition("@")
        word, _, rest = what.partition(".")
        if (word, unit) not in FACTORS:
            raise BadExpectation(f"'{word}' in '{unit}' is not read; there is {', '.join(f'{w} [{u}]' for w, u in FACTORS)}")
        reader = {"run": self.of_run, "beaker": self.of_beaker, "ladder": self.of_ladder}[self.kind]
        return FACTORS[word, unit] * float(reader(word, rest, moment, unit))

    def of_ladder(self, word, rest, moment, unit):
        axes = {"recovery": "element", "extraction": "element", "dissolved": "component"}
        if word == "ph" and not rest:
            return self.data["ph"][self.row(moment)]
        if word not in axes or unit == "mol":
            raise BadExpectation(f"'{word}' in '{unit}' is not read from ladders")
        return self.data[word][self.row(moment), self.index(axes[word], rest)]

    def of_run(self, word, rest, moment, _):
        if word == "ph":
            return self.data["ph"][self.row(moment) if moment else -1, self.index("unit", rest)]
        if word not in ("recovery", "extraction"):
            raise BadExpectation(f"'{word}' is read from beakers only")
        element, _, family = rest.partition(".")
        table = word + ("_by_family" if family else "")
        numbers = self.data[table][self.row(moment)] if moment else self.data["steady_" + table]
        numbers = numbers[self.index("element", element)]
        return numbers[self.index("family", family)] if family else numbers

    def of_beaker(self, word, rest, moment, unit):
        step = self.row(moment)
        if word == "ph" and not rest:
            return self.data["ph"][step]
        if word == "dissolved":
            amount = self.data["dissolved"][step, self.index("component", rest)]
            return amount / self.data["liquor_volume"][step] if unit == "mol/L" else amount
        if word == "free":
            return self.data["molality"][step, self.index("species", rest)]
        if word == "formed":
            amount = self.data["formed"][step, self.index("mineral", rest)]
            return amount * self.molar_mass(rest) if unit == "g" else amount
        raise BadExpectation(f"'{word}' is read from runs only")

    def molar_mass(self, mineral):
        """g/mol, from the formula that stands alone on the left of its solubility reaction."""
        reaction = self.data["constant_reaction"][self.index("constant", mineral)].decode()
        atoms, _ = check_sources.parse_formula(reaction.split(" = ")[0])
        with open(os.path.join(support.TREE, "models", "data", "atomic_weights.yaml"), encoding="utf-8") as file:
            weights = {one["element"]: float(one["weight"].split()[0]) for one in yaml.safe_load(file)["atomic_weights"]}
        return sum(count * weights[element] for element, count in atoms.items())


class Ledger:
    """What a campaign watched, as the names of expectations see it."""

    def __init__(self, path):
        with sqlite3.connect(f"file:{path}?mode=ro", uri=True) as ledger:
            self.values = {(name, number): value for name, number, value in ledger.execute("SELECT watched, number, value FROM results")}

    def value(self, name, unit):
        what, _, moment = name.partition("@case ")
        word = what.partition(".")[0]
        if (word, unit) not in FACTORS or not moment.isdigit() or self.values.get((what, int(moment))) is None:
            raise BadExpectation(f"'{name}' in '{unit}' is not watched; write for example recovery.Ag@case 3 in %")
        return FACTORS[word, unit] * self.values[what, int(moment)]


# What a kind of file leaves, and how it is read.
OUTCOMES = {"flowsheet": (".h5", Results), "beaker": (".h5", Results), "ladder": (".ladder.h5", Results), "campaign": (".ledger", Ledger)}


def head_lines(path, word):
    head = re.match(r"(#.*\n)*", support.read_text(path)).group()
    return re.findall(rf"^# {word}:\s*(.*?)\s*$", head, re.M)


def compare(results, line):
    """None when the file agrees with a line of the head, else what is wrong."""
    read = EXPECTED.fullmatch(line)
    if not read:
        return f"'{line}' is not read; write for example recovery.Ag = 84.2 % within 0.2"
    expected, tolerance = float(read["value"]), float(read["tolerance"])
    if not 0 < tolerance < max(abs(expected), 1):
        return f"'{line}': the tolerance must be above 0 and below the value"
    try:
        found = results.value(read["name"], read["unit"] or "")
    except BadExpectation as why:
        return f"'{line}': {why}"
    if not abs(found - expected) <= tolerance:
        return f"'{line}': the file has {found:.6g}"
    return None


class Examples(InACopy):
    def test_every_example_runs_and_meets_its_figures(self):
        self.assertTrue(EXAMPLES)
        for path in EXAMPLES:
            name = os.path.basename(path)
            with self.subTest(example=name):
                commands = head_lines(path, "Command")
                self.assertEqual(len(commands), 1, "the head needs one line '# Command:'")
                self.assertTrue(commands[0].startswith(OURS) and f"flowsheets/{name}" in commands[0], commands[0])
                done = self.copy.run(commands[0])
                self.assertEqual(done.returncode, 0, done.stderr.decode("utf-8", "replace"))
                expected = head_lines(path, "Expect")
                self.assertTrue(expected, "the head needs a line '# Expect:'")
                ending, reader = OUTCOMES[re.search(r"^kind:\s*(\w+)", support.read_text(path), re.M).group(1)]
                results = reader(os.path.join(self.copy.folder, "outputs", name[:-len(".yaml")] + ending))
                wrong = [why for why in (compare(results, line) for line in expected) if why]
                self.assertEqual(wrong, [])


class Grammar(unittest.TestCase):
    """The checker itself sees what it should."""

    def setUp(self):
        self.results = Results.__new__(Results)
        self.results.kind = "run"
        self.results.data = {"element": [b"Ag"], "family": [b"ammine"], "unit": [b"L.1"], "time": numpy.array([0.0, 1.0]),
                             "steady_recovery": numpy.array([0.842]), "steady_recovery_by_family": numpy.array([[0.8]]),
                             "recovery": numpy.array([[0.1], [0.2]]), "ph": numpy.array([[9.0], [10.0]])}

    def test_right(self):
        for line in ("recovery.Ag = 84.2 % within 0.2", "recovery.Ag.ammine = 80 % within 1", "recovery.Ag@1 h = 20 % within 0.1",
                     "ph.L.1 = 10.0 within 0.05", "ph.L.1@0 h = 9.04 within 0.05"):
            self.assertIsNone(compare(self.results, line), line)

    def test_wrong(self):
        for line in ("pending", "recovery.Ag = 84.2 %", "recovery.Ag = 83.9 % within 0.2", "recovery.Au = 84.2 % within 0.2",
                     "recovery.Ag = 0.842 within 0.002", "ph.L.2 = 10 within 0.1", "ph.L.1@7 h = 10 within 0.1", "grade.Ag = 84.2 % within 0.2",
                     "recovery.Ag = 84.2 % within 0", "recovery.Ag = 84.2 % within 100"):
            self.assertIsNotNone(compare(self.results, line), line)

    def test_ladder(self):
        ladder = Results.__new__(Results)
        ladder.kind = "ladder"
        ladder.data = {"rung": numpy.array([1.0, 2.0]), "element": [b"Ag"], "component": [b"Ag(I)"], "recovery": numpy.array([[0.5], [0.9]]),
                       "ph": numpy.array([9.0, 10.0]), "dissolved": numpy.array([[10.0], [20.0]])}
        for line in ("recovery.Ag@rung 2 = 90 % within 0.1", "ph@rung 1 = 9.0 within 0.1", "dissolved.Ag(I)@rung 2 = 0.02 mol/L within 0.001"):
            self.assertIsNone(compare(ladder, line), line)
        for line in ("recovery.Ag@rung 1 = 90 % within 0.1", "recovery.Ag@rung 3 = 90 % within 0.1", "recovery.Ag@rung 0 = 90 % within 0.1", "recovery.Ag = 90 % within 0.1",
                     "ph.L.1@rung 1 = 9.0 within 0.1", "dissolved.Au(I)@rung 2 = 0.02 mol/L within 0.001"):
            self.assertIsNotNone(compare(ladder, line), line)


if __name__ == "__main__":
    unittest.main()
