"""A ladder's rungs are what single runs of its variants give, bit for bit; and the trends that a metallurgist expects.

usage: /usr/bin/python3 check_ladder.py LEAT_BINARY [unittest options], or LEAT in the environment.

A variant is made here by another road than the program's: PyYAML says where a value starts and ends.
"""
import os
import re
import shutil
import signal
import struct
import subprocess
import sys
import tempfile
import time
import unittest

import h5py
import numpy
import yaml

HERE = os.path.dirname(os.path.abspath(__file__))
sys.path[:0] = [os.path.join(HERE, "..", "abuse")]
import command_support as support

LEAT = support.binary()
THREE = os.path.join(support.FLOWSHEETS, "ladder_three_lixiviants.yaml")
STRENGTH = os.path.join(support.FLOWSHEETS, "ladder_ammonia_strength.yaml")
RESIDUE = os.path.join(support.FLOWSHEETS, "1_ammine_residue.yaml")
STEPS = os.path.join(support.FLOWSHEETS, "beaker_silver_ammonia.yaml")
STRONG = os.path.join(support.FLOWSHEETS, "beaker_ammonia_strength.yaml")


def variant(text, path, value):
    """The text with one value replaced; keys of a path are taken as they fit, the longest first."""
    node, rest = yaml.compose(text), path
    while rest:
        if isinstance(node, yaml.MappingNode):
            fits = [(key.value, one) for key, one in node.value if rest == key.value or rest.startswith(key.value + ".")]
        else:
            names = [dict((k.value, v.value) for k, v in one.value).get("name", str(n)) for n, one in enumerate(node.value, 1)]
            fits = [(name, one) for name, one in zip(names, node.value) if rest == name or rest.startswith(name + ".")]
        key, node = max(fits, key=lambda fit: len(fit[0]))
        rest = rest[len(key) + 1:]
    return text[:node.start_mark.index] + value + text[node.end_mark.index:]


def bits(number):
    return struct.pack("<d", float(number))


def words(data):
    return [one.decode() for one in data[()]]


class Climbed(unittest.TestCase):
    def setUp(self):
        self.folder = tempfile.mkdtemp(prefix="leat_ladder_")
        self.addCleanup(shutil.rmtree, self.folder, True)

    def path(self, name):
        return os.path.join(self.folder, name)

    def put(self, name, text):
        with open(self.path(name), "w", encoding="utf-8") as file:
            file.write(text)
        return self.path(name)

    def leat(self, *words_, code=0):
        done = support.run([LEAT, *words_], self.folder, seconds=120)
        self.assertEqual(done.code, code, done.err)
        return done

    def ladder(self, *words_, code=0):
        self.leat("ladder", *words_, "--out", "ladder.h5", code=code)
        file = h5py.File(self.path("ladder.h5"), "r")
        self.addCleanup(file.close)
        return file


class SameBits(Climbed):
    def compare(self, rungs, r, single, step):
        """Every number of a rung against the single run's file."""
        beaker = single.attrs["leat_kind"].decode() == "beaker"
        labels = {axis: words(single[axis]) for axis in ("species", "component", "mineral", "family")}

        def expect(name, axis, values):
            for label, value in zip(labels[axis], values):
                self.assertEqual(bits(rungs[name][r, words(rungs[axis]).index(label)]), bits(value), f"{name} {label}")
        if beaker:
            row = words(single["step_name"]).index(step) if step else -1
            volume = single["liquor_volume"][row]
            ph, strength, molality = single["ph"][row], single["ionic_strength"][row], single["molality"][row]
            expect("dissolved", "component", single["dissolved"][row] / volume)
            expect("formed", "mineral", single["formed"][row] / volume)
            expect("saturation_index", "mineral", single["saturation_index"][row])
        else:
            stream = words(single["stream"]).index(single.attrs["leat_pregnant_liquor"].decode())
            ph, strength = single["steady_stream_ph"][stream], single["steady_stream_ionic_strength"][stream]
            molality = single["steady_pregnant_liquor_molality"][()]
            expect("dissolved", "component", single["steady_stream_dissolved"][stream] / single["steady_stream_liquor_flow"][stream])
            elements, families = words(single["element"]), words(single["family"])
            for name in ("recovery", "extraction", "formed_leaving"):
                for e, element in enumerate(elements):
                    self.assertEqual(bits(rungs[name][r, words(rungs["element"]).index(element)]), bits(single["steady_" + name][e]), f"{name} {element}")
            for e, element in enumerate(elements):
                for f, family in enumerate(families):
                    at = r, words(rungs["element"]).index(element), words(rungs["family"]).index(family)
                    self.assertEqual(bits(rungs["recovery_by_family"][at]), bits(single["steady_recovery_by_family"][e, f]))
            for k, stream in enumerate(words(single["stream"])):
                if not numpy.isnan(single["reagent_consumption"][k]):
                    self.assertEqual(bits(rungs["reagent_consumption"][r, words(rungs["stream"]).index(stream)]), bits(single["reagent_consumption"][k]))
        self.assertEqual(bits(rungs["ph"][r]), bits(ph))
        self.assertEqual(bits(rungs["ionic_strength"][r]), bits(strength))
        self.compare_shares(rungs, r, single, molality, labels)

    def compare_shares(self, rungs, r, single, molality, labels):
        for j, component in enumerate(labels["component"]):
            if single["component_role"][j] != b"metal" or component in ("Na", "K", "Ca", "Mg"):
                continue
            held = [single["species_content"][i, j] * molality[i] for i in range(len(molality))]
            total = 0.0
            for one in held:
                total += one  # in the order of the file, as the program does
            for i, species in enumerate(labels["species"]):
                found = rungs["share"][r, words(rungs["component"]).index(component), words(rungs["species"]).index(species)]
                if total > 0:
                    self.assertEqual(bits(found), bits(held[i] / total), f"{component} {species}")
                else:
                    self.assertTrue(numpy.isnan(found))

    def follow(self, rungs, step="", every=1):
        """Runs the variants of a ladder one by one; returns how many."""
        bases = dict(zip(words(rungs["series_name"]), zip(words(rungs["ladder_base_text"]), words(rungs["stepped_path"]))))
        count = 0
        for r in range(0, len(rungs["rung"]), every):
            if rungs["status"][r] != b"solved":
                continue
            text, path = bases[rungs["series"][r].decode()]
            self.put("variant.yaml", variant(text, path, rungs["value_as_typed"][r].decode()))
            self.leat("run", "variant.yaml", "--out", "single.h5")
            with self.subTest(rung=r + 1), h5py.File(self.path("single.h5"), "r") as single:
                self.compare(rungs, r, single, step)
            count += 1
        return count

    def test_three_series_of_circuits(self):
        self.assertEqual(self.follow(self.ladder(THREE)), 30)

    def test_every_rung_over_a_wide_range_is_solved(self):
        """Finer and wider than the example: a rung that finds no steady state is a fault of the solver, not of these circuits."""
        for name, what in (("ammonia", "NH3: 0.1 % to 12 %"), ("chloride", "NaCl: 1 % to 22 %"), ("cyanide", "NaCN: 0.01 % to 1 %")):
            rungs = self.ladder(os.path.join(support.FLOWSHEETS, f"silver_in_{name}.yaml"), "--vary", f"reagents.lixiviant.made_of.{what} in 60 logarithmic points")
            with self.subTest(lixiviant=name):
                self.assertEqual({one.decode() for one in rungs["status"]}, {"solved"})

    def test_a_beaker(self):
        self.assertEqual(self.follow(self.ladder(STRENGTH)), 13)

    def test_a_step_of_a_beaker(self):
        self.put("beaker.yaml", support.read_text(STEPS))
        self.put("steps.yaml", "leat: 1\nkind: ladder\nof: beaker.yaml\nstep: filtered\nvary: {beaker.liquor.NH3: 3 to 6 mol/L in 4 points}\n")
        rungs = self.ladder("steps.yaml")
        self.assertEqual([one.decode() for one in rungs["status"]], ["not_solved", "solved", "solved", "solved"])
        self.assertIn("no amount of H2SO4", rungs["reason"][0].decode())
        self.assertTrue(numpy.isnan(rungs["ph"][0]) and numpy.isnan(rungs["share"][0]).all())
        self.assertEqual(self.follow(rungs, "filtered"), 3)

    def test_a_history_changes_no_rung(self):
        """The example has a history, which `leat run` follows and a ladder does not."""
        self.assertEqual(self.follow(self.ladder(RESIDUE, "--vary", "streams.wash.rate: 3 to 5 m3/h in 2 points")), 2)

    def test_words_are_stepped_too(self):
        rungs = self.ladder(STRONG, "--vary", "chemistry.activity = [davies, ideal]")
        self.assertEqual(list(rungs["stepped"][()]), [1, 2])
        self.assertEqual(rungs.attrs["leat_stepped_units"], b"1")
        self.assertEqual(self.follow(rungs), 2)

    def test_the_same_ladder_twice_is_the_same_file(self):
        self.leat("ladder", THREE, "--out", "one.h5")
        self.leat("ladder", THREE, "--out", "two.h5")
        for name in ("one", "two"):
            self.assertTrue(os.path.exists(self.path(f"{name}.h5")))
        with open(self.path("one.h5"), "rb") as one, open(self.path("two.h5"), "rb") as two:
            self.assertEqual(one.read(), two.read())

    def test_the_order_of_series_changes_no_number(self):
        text = support.read_text(THREE)
        lines = [line for line in text.splitlines() if re.match(r"  \w+: {of:", line)]
        self.assertEqual(len(lines), 3)
        for name in ("ammonia", "chloride", "cyanide"):
            shutil.copy(os.path.join(support.FLOWSHEETS, f"silver_in_{name}.yaml"), self.folder)
        turned = text.replace("\n".join(lines), "\n".join(reversed(lines)))
        rungs, other = self.ladder(THREE), None
        self.leat("ladder", self.put("turned.yaml", turned), "--out", "turned.h5")
        with h5py.File(self.path("turned.h5"), "r") as other:
            place = {(s, v): r for r, (s, v) in enumerate(zip(words(other["series"]), words(other["value_as_typed"])))}
            for r, key in enumerate(zip(words(rungs["series"]), words(rungs["value_as_typed"]))):
                for name in ("ph", "closure"):
                    self.assertEqual(bits(rungs[name][r]), bits(other[name][place[key]]))
                for name, axis in (("dissolved", "component"), ("recovery", "element"), ("reagent_consumption", "stream"), ("formed", "mineral")):
                    for k, label in enumerate(words(rungs[axis])):
                        self.assertEqual(bits(rungs[name][r, k]), bits(other[name][place[key], words(other[axis]).index(label)]), f"{name} {label} {key}")


class Trends(Climbed):
    def of(self, rungs, name, axis, label):
        return rungs[name][:, words(rungs[axis]).index(label)]

    def test_shares_are_whole(self):
        rungs = self.ladder(THREE)
        silver = words(rungs["component"]).index("Ag(I)")
        for name in ("share", "family_share"):
            sums = numpy.nansum(rungs[name][:, silver, :], axis=1)
            self.assertLess(abs(sums - 1).max(), 1e-12, name)
        self.assertLess(rungs["closure"][()].max(), 1e-9)

    def test_silver_chloride_in_chloride_has_a_least_solubility(self):
        """Ag^+ falls with chloride, AgCl2^- and more rise: near 3 mmol/L they meet (from memory, textbooks of analytical chemistry)."""
        case = support.read_text(STRONG).replace("NH3: 1 mol/L, (NH4)2SO4: 0.2 mol/L, NaCl: 0.02 mol/L", "NaCl: 0.02 mol/L").replace("tenorite: 80 g", "quartz: 1 g")
        case = case.replace(", quartz: 1 g", "").replace(", tenorite]", "]")
        rungs = self.ladder(self.put("case.yaml", case), "--vary", "beaker.liquor.NaCl: 1e-5 mol/L to 4 mol/L in 40 logarithmic points")
        silver, chloride = self.of(rungs, "dissolved", "component", "Ag(I)"), rungs["stepped"][()]
        least = int(silver.argmin())
        self.assertTrue(1e-3 < chloride[least] < 1e-2, chloride[least])
        self.assertTrue((numpy.diff(silver[:least + 1]) < 0).all() and (numpy.diff(silver[least:]) > 0).all())
        self.assertTrue(1e-4 < silver[least] < 1e-3, silver[least])  # mol/m3

    def test_silver_chloride_in_ammonia_rises_with_it(self):
        """Without chloride of its own: dissolved silver = sqrt(K) times free ammonia, a straight line in what is free."""
        case = support.read_text(STRONG).replace(", (NH4)2SO4: 0.2 mol/L, NaCl: 0.02 mol/L", "").replace(", tenorite: 80 g", "").replace(", tenorite]", "]")
        case = case.replace("davies", "ideal")
        rungs = self.ladder(self.put("case.yaml", case), "--vary", "beaker.liquor.NH3: 0.1 mol/L to 1 mol/L in 10 points")
        silver = self.of(rungs, "dissolved", "component", "Ag(I)")
        free = self.of(rungs, "dissolved", "component", "NH3") - 2 * silver
        self.assertTrue((numpy.diff(silver) > 0).all())
        self.assertLess(abs(silver / free / (silver / free)[3] - 1).max(), 0.03)

    def test_cyanide_takes_two_a_silver(self):
        rungs = self.ladder(THREE)
        cyanide = [r for r, name in enumerate(words(rungs["series"])) if name == "cyanide"]
        use = numpy.nansum([rungs["reagent_consumption"][r, words(rungs["stream"]).index("lixiviant")] for r in cyanide[:1]]) / 0.0490072  # mol NaCN a kg of solids
        # 0.30 % chlorargyrite and 0.03 % silver hold this much silver [mol/kg]; IUPAC atomic weights.
        fed = 0.0030 / 0.1433212 + 0.0003 / 0.1078682
        extraction = rungs["extraction"][cyanide[0], 0]
        self.assertAlmostEqual(extraction * fed * 2 / use, 1.0, delta=0.03)
        self.assertGreater(rungs["extraction"][cyanide[-1], 0], 0.99)


class Endings(Climbed):
    def test_a_rung_at_fault_is_a_row(self):
        rungs = self.ladder(RESIDUE, "--vary", "circuit.T1.solids_fraction: [30 %, 50 %, 120 %, fifty]")
        self.assertEqual([one.decode() for one in rungs["status"]], ["solved", "solved", "input_fault", "input_fault"])
        self.assertIn("1_ammine_residue.yaml:", rungs["reason"][2].decode())
        self.assertTrue(numpy.isnan(rungs["recovery"][2:]).all())

    def refused(self, code, *words_):
        done = self.leat("ladder", *words_, code=code)
        self.assertEqual(done.out, "")
        self.assertEqual([name for name in support.files_under(self.folder) if not name.endswith(".yaml")], [])
        return done.err

    def test_all_at_fault_ends_with_2_and_lists_the_first(self):
        told = self.refused(2, RESIDUE, "--vary", "circuit.T1.solids_fraction: 2 m3/h to 3 m3/h in 3 points")
        self.assertRegex(told, r"1_ammine_residue\.yaml:\d+:\d+ .*2 m3/h")
        self.assertNotIn("3 m3/h", told)

    def test_none_solved_ends_with_3(self):
        self.assertIn("no amount of H2SO4", self.refused(3, STEPS, "--vary", "beaker.liquor.NH3: 0.5 to 1 mol/L in 2 points"))

    def test_a_renamed_step_is_no_crash(self):
        self.put("beaker.yaml", support.read_text(STEPS))
        self.put("names.yaml", "leat: 1\nkind: ladder\nof: beaker.yaml\nstep: filtered\nvary: {steps.4.name: [filtered, other]}\n")
        rungs = self.ladder("names.yaml")
        self.assertEqual([one.decode() for one in rungs["status"]], ["solved", "not_solved"])

    def test_what_cannot_be_written_ends_with_4(self):
        done = self.leat("ladder", STRENGTH, "--out", "/dev/full", code=4)
        self.assertIn("/dev/full", done.err)

    def test_names_of_the_files(self):
        self.leat("ladder", STRENGTH)
        self.assertIn("outputs/ladder_ammonia_strength.ladder.h5", support.files_under(self.folder))
        self.leat("ladder", STRONG, "--vary", "beaker.liquor.NH3: 1 to 2 mol/L in 2 points")
        self.assertIn("outputs/beaker_ammonia_strength.ladder.h5", support.files_under(self.folder))

    def test_a_stop_keeps_the_rungs_that_are_done(self):
        begun = time.monotonic()
        with subprocess.Popen([LEAT, "ladder", RESIDUE, "--vary", "streams.wash.rate: 2 to 6 m3/h in 2000 points", "--out", "ladder.h5"], cwd=self.folder,
                              stdout=subprocess.PIPE, stderr=subprocess.PIPE) as started:
            time.sleep(4)
            started.send_signal(signal.SIGINT)
            out, err = started.communicate(timeout=60)
        self.assertEqual(started.returncode, 4, err.decode())
        self.assertLess(time.monotonic() - begun, 60)
        with h5py.File(self.path("ladder.h5"), "r") as rungs:
            count = len(rungs["rung"])
            self.assertTrue(0 < count < 2000)
            self.assertTrue((rungs["status"][()] == b"solved").all())
            self.assertIn(f"{count} of 2000", rungs["failure"][()].decode())
        self.assertIn(f"{count} of 2000", err.decode() + out.decode())


if __name__ == "__main__":
    unittest.main()
