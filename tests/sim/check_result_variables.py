"""Compares results files with the tables of outputs/README.md, both ways, and opens them with h5py, xarray and ncdump.

usage: /usr/bin/python3 check_result_variables.py README FILE.h5 [FILE.h5 ...]
       /usr/bin/python3 check_result_variables.py README --leat LEAT_BINARY   (runs every example, then compares)

Every item of a file stands in the table for its kind (`### In a run`, `### In a beaker`, `### In a ladder`), or is the twin at rest of one, with the same axes and unit, and
every row of the table is in the file; the same for the attributes. A unit `as typed` may be any. The format version of page and file agree. Ends with 1
and a line for each difference.
"""
import glob
import os
import re
import subprocess
import sys
import tempfile

import h5py
import xarray

TABLES = {"run": "In a run", "beaker": "In a beaker", "ladder": "In a ladder"}
TWIN = "steady_"  # a variable over time has a twin at rest, not listed again
ATTRIBUTES = "Attributes"
HEADER = ["name", "axes", "unit", "meaning"]


def text(value):
    return value.decode("utf-8") if isinstance(value, bytes) else str(value)


# The page -----------------------------------------------------------------------------------------------------------

def section(page, title):
    found = re.search(rf"^### {re.escape(title)}$(.*?)(?=^#|\Z)", page, re.M | re.S)
    return found.group(1) if found else ""


def rows(part):
    """Cells of each row of the first table of a section, code marks off, header and rule included."""
    lines = [line for line in part.splitlines() if line.startswith("|")]
    return [[cell.strip().strip("`") for cell in line.strip("|").split("|")] for line in lines]


def table(page, title, faults):
    """{name: (axes, unit)} of a table of variables."""
    read = rows(section(page, title))
    if not read or read[0] != HEADER:
        faults.append(f"README: no table '{' | '.join(HEADER)}' under '### {title}'")
        return {}
    listed = {}
    for cells in read[2:]:
        if len(cells) != len(HEADER) or not cells[3]:
            faults.append(f"README, {title}: a row of {len(cells)} cells, or without a meaning: {cells}")
            continue
        if cells[0] in listed:
            faults.append(f"README, {title}: '{cells[0]}' is listed twice")
        listed[cells[0]] = (tuple(re.findall(r"\w+", cells[1])), cells[2])
    return listed


def page_version(page):
    found = re.search(r"^Format version (\S+)\.$", page, re.M)
    return found.group(1) if found else "none"


# A file -------------------------------------------------------------------------------------------------------------

def unit_of(data):
    """The unit; `text` or `flag` where there is none."""
    if "flag_meanings" in data.attrs:
        return "flag"
    return text(data.attrs["units"]) if "units" in data.attrs else "text"


def contents(path):
    """{name: (axes, unit)} and the attributes of a results file."""
    with h5py.File(path, "r") as file:
        items = {}
        for name, data in file.items():
            scale = bool(h5py.h5ds.is_scale(data.id))
            axes = (name,) if scale else tuple(dim[0].name.strip("/") for dim in data.dims)
            items[name] = (axes, unit_of(data))
        return items, {name: text(value) for name, value in file.attrs.items()}


def h5_text(path, name):
    with h5py.File(path, "r") as file:
        return file[name][()]


def twins(listed):
    """The twins at rest of the variables over time, which the README lists by a rule."""
    return {TWIN + name: (axes[1:], unit) for name, (axes, unit) in listed.items()
            if axes[:1] == ("time",) and name != "time" and not name.endswith("_to_date") and name != "held_in_vessels"}


def compare(path, page, faults):
    items, attributes = contents(path)
    where = os.path.basename(path)
    kind = attributes.get("leat_kind")
    if kind not in TABLES:
        faults.append(f"{where}: leat_kind is '{kind}'")
        return
    if attributes.get("leat_format_version") != page_version(page):
        faults.append(f"{where}: format version {attributes.get('leat_format_version')}, the README says {page_version(page)}")
    listed = table(page, TABLES[kind], faults)
    if kind == "run" and not text(h5_text(path, "failure")):
        listed.update(twins(listed))
    for name in items.keys() - listed.keys():
        axes, unit = items[name]
        faults.append(f"{where}: '{name}' ({', '.join(axes)}) [{unit}] is not listed under '{TABLES[kind]}'")
    for name in listed.keys() - items.keys():
        faults.append(f"{where}: '{name}', listed under '{TABLES[kind]}', is not in the file")
    for name in items.keys() & listed.keys():
        axes, unit = listed[name]
        if items[name] != (axes, items[name][1] if unit == "as typed" else unit):
            faults.append(f"{where}: '{name}' has axes and unit {items[name]}, the README says {listed[name]}")
    named = {cells[0]: cells[1] for cells in rows(section(page, ATTRIBUTES))[2:] if len(cells) == 3}
    expected = {name for name, kinds in named.items() if kind in kinds}
    for name in attributes.keys() ^ expected:
        faults.append(f"{where}: attribute '{name}' stands in {'the file' if name in attributes else 'the README'} alone")


def open_everywhere(path, faults):
    """h5py has read it above; xarray and ncdump see the same items."""
    items, _ = contents(path)
    with xarray.open_dataset(path) as results:
        if set(results.variables) != set(items):
            faults.append(f"{path}: xarray sees {set(results.variables) ^ set(items)} otherwise")
        for name in results.variables:
            if results[name].dims != items[name][0]:
                faults.append(f"{path}: xarray sees '{name}' over {results[name].dims}")
            results[name].load()
    for options in (["-h"], []):
        done = subprocess.run(["ncdump", *options, path], capture_output=True)
        if done.returncode != 0:
            faults.append(f"{path}: ncdump ends with {done.returncode}: {done.stderr.decode()[:200]}")
            continue
        shown = done.stdout.decode("utf-8")
        for name, (axes, _) in items.items():
            if (f" {name}({', '.join(axes)}) ;" if axes else f" {name} ;") not in shown:
                faults.append(f"{path}: ncdump does not show '{name}'")


def of_examples(binary, folder, faults):
    """Results of every example of the tree, run here."""
    examples = os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "..", "flowsheets", "*.yaml")
    made = []
    for example in sorted(glob.glob(examples)):
        out = os.path.join(folder, os.path.basename(example) + ".h5")
        with open(example, encoding="utf-8") as file:
            kind = re.search(r"^kind:\s*(\w+)", file.read(), re.M).group(1)
        if kind == "campaign":
            continue  # its cases' files are those of runs
        done = subprocess.run([binary, "ladder" if kind == "ladder" else "run", example, "--out", out], capture_output=True)
        if done.returncode == 0:
            made.append(out)
        else:
            faults.append(f"{example}: ends with {done.returncode}: {done.stderr.decode()[:300]}")
    return made


def main():
    if len(sys.argv) < 3 or (sys.argv[2] == "--leat" and len(sys.argv) != 4):
        print(__doc__)
        return 2
    faults = []
    with open(sys.argv[1], encoding="utf-8") as file:
        page = file.read()
    with tempfile.TemporaryDirectory(prefix="leat_variables_") as folder:
        paths = of_examples(os.path.abspath(sys.argv[3]), folder, faults) if sys.argv[2] == "--leat" else sys.argv[2:]
        for path in paths:
            compare(path, page, faults)
            open_everywhere(path, faults)
        if sys.argv[2] == "--leat" and {contents(path)[1]["leat_kind"] for path in paths} != set(TABLES):
            faults.append("the examples do not show every kind of results file")
    for line in sorted(set(faults)):
        print(line)
    print(f"{len(paths)} files, {len(set(faults))} differences")
    return 1 if faults else 0


if __name__ == "__main__":
    sys.exit(main())
