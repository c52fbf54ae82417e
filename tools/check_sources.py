#!/usr/bin/python3
"""Checks the data library: every number has a source and evidence, every constant a spread,
every reaction balances in elements and charge, and no two entries share a name.

    check_sources.py [FOLDER]      FOLDER: models/data beside this file's parent if not given

Prints each fault with its file and entry and exits with 1; prints the counts and exits with 0 if there is none.
"""
import os
import re
import sys

import yaml

EVIDENCE = {"published", "derived", "from memory", "common practice, no source"}
ROLES = {"water", "proton", "metal", "ligand", "gas"}
PHASES = ("(aq)", "(s)", "(g)", "(am)", "(l)", "(alpha)", "(beta)", "(gamma)")
QUANTITIES = {  # key -> unit its value must carry
    "temperature": "degC", "ionic_strength": "mol/kg", "enthalpy": "kJ/mol", "density": "g/cm3",
    "weight": "g/mol", "henry": "mol/L/atm", "henry_temperature": "K", "volume": "cm3/mol", "pressure": "Pa",
}
LISTS = {  # file -> its lists of entries
    "atomic_weights.yaml": ["atomic_weights"], "components.yaml": ["components"], "solids.yaml": ["solids"],
    "minerals.yaml": ["minerals"], "gases.yaml": ["gases"], "debye_huckel.yaml": ["debye_huckel"],
    "liquor_density.yaml": ["density_salts", "ionic_volumes"], "water_vapour.yaml": ["table"], "limits.yaml": ["air_limits"],
}
SINGLES = {"liquor_density.yaml": ["water_density"], "water_vapour.yaml": ["water_vapour", "full_range"]}

faults = []


def fault(place, text):
    faults.append(f"{place}: {text}")


class UniqueKeys(yaml.SafeLoader):
    """Refuses a key given twice in one mapping."""


def unique_mapping(loader, node):
    seen = set()
    for key, _ in node.value:
        if key.value in seen:
            raise yaml.YAMLError(f"line {key.start_mark.line + 1}: key '{key.value}' given twice")
        seen.add(key.value)
    return loader.construct_mapping(node, deep=True)


UniqueKeys.add_constructor(yaml.resolver.BaseResolver.DEFAULT_MAPPING_TAG, unique_mapping)


# Formulas -----------------------------------------------------------------------------------------------------------

def read_group(text, at, closing):
    """Atoms of text from `at` up to the closing bracket (or the end); returns atoms and the place after it."""
    atoms = {}
    while at < len(text) and text[at] != closing:
        element = re.match(r"[A-Z][a-z]*", text[at:])
        if element:
            part, at = {element.group(): 1.0}, at + element.end()
        elif text[at] in "([":
            part, at = read_group(text, at + 1, ")" if text[at] == "(" else "]")
        else:
            raise ValueError(f"unexpected '{text[at]}'")
        count = re.match(r"\d+(?:\.\d+)?", text[at:])
        factor = float(count.group()) if count else 1.0
        at += count.end() if count else 0
        for symbol, n in part.items():
            atoms[symbol] = atoms.get(symbol, 0.0) + factor * n
    if closing and at >= len(text):
        raise ValueError("a bracket is not closed")
    return atoms, at + 1


def parse_formula(text):
    """Atoms and charge of `Ag(NH3)2^+`, `CaSO4.2H2O`, `Fe4[Fe(CN)6]3`, `AgCl(aq)`, `e^-`."""
    if text == "e^-":
        return {}, -1.0
    body = text
    for phase in PHASES:
        if body.endswith(phase) and len(body) > len(phase):
            body = body[: -len(phase)]
            break
    charge = 0.0
    if "^" in body:
        body, mark = body.split("^", 1)
        match = re.fullmatch(r"(\d*)([+-])", mark)
        if not match:
            raise ValueError(f"'{mark}' is not a charge")
        charge = float(match.group(1) or 1) * (1 if match.group(2) == "+" else -1)
    water = re.search(r"\.(\d+(?:\.\d+)?|\.\d+)?H2O$", body)
    parts = [(1.0, body)]
    if water:
        # the earliest point from which the rest reads as a count of water
        for point in (m.start() for m in re.finditer(r"\.", body)):
            if re.fullmatch(r"\.(\d+(?:\.\d+)?)?H2O", body[point:]):
                count = body[point + 1 : -3]
                parts = [(1.0, body[:point]), (float(count or 1), "H2O")]
                break
    atoms = {}
    for factor, part in parts:
        for symbol, n in read_group(part, 0, "")[0].items():
            atoms[symbol] = atoms.get(symbol, 0.0) + factor * n
    if not atoms:
        raise ValueError("no element found")
    return atoms, charge


def parse_reaction(text):
    """Terms of both sides as (coefficient, name)."""
    sides = text.split(" = ")
    if len(sides) != 2 or text.count("=") != 1:
        raise ValueError("a reaction has one ' = '")
    read = []
    for side in sides:
        terms = []
        for term in side.split(" + "):
            words = term.split(" ")
            if len(words) > 2 or "" in words:
                raise ValueError(f"'{term}' is not a coefficient, a space and a name")
            terms.append((float(words[0]) if len(words) == 2 else 1.0, words[-1]))
        read.append(terms)
    return read


def check_balance(place, sides):
    total, charge = {}, 0.0
    for sign, terms in zip((-1, 1), sides):
        for coefficient, name in terms:
            try:
                atoms, z = parse_formula(name)
            except ValueError as why:
                return fault(place, f"'{name}' is not a formula: {why}")
            charge += sign * coefficient * z
            for symbol, n in atoms.items():
                total[symbol] = total.get(symbol, 0.0) + sign * coefficient * n
    off = {symbol: round(n, 6) for symbol, n in total.items() if abs(n) > 1e-9}
    if abs(charge) > 1e-9:
        off["charge"] = round(charge, 6)
    if off:
        fault(place, f"does not balance: {off}")


# Entries ------------------------------------------------------------------------------------------------------------

def check_provenance(place, entry, sources, used):
    for key in [k for k in entry if k == "source" or k.endswith("_source")]:
        used.add(entry[key])
        if entry[key] not in sources:
            fault(place, f"{key} '{entry[key]}' is not in sources.yaml")
    for key in [k for k in entry if k == "evidence" or k.endswith("_evidence")]:
        if entry[key] not in EVIDENCE:
            fault(place, f"{key} '{entry[key]}' is not one of {sorted(EVIDENCE)}")
    for key in ("source", "evidence"):
        if key not in entry:
            fault(place, f"{key} is missing")


def check_quantities(place, entry):
    for key, unit in QUANTITIES.items():
        if key in entry and not re.fullmatch(r"-?\d+(\.\d+)?(e-?\d+)? " + re.escape(unit), str(entry[key])):
            fault(place, f"{key}: '{entry[key]}' is not a number in {unit}")
    for row in entry.get("also_at", []):
        check_quantities(place, row)
        if not isinstance(row.get("log10_k"), (int, float)):
            fault(place, "also_at: log10_k is missing")


def check_spread(place, entry):
    spread = entry.get("spread")
    number = spread if isinstance(spread, (int, float)) else None
    if isinstance(spread, str) and re.fullmatch(r"\d+(\.\d+)? \S+", spread):
        number = float(spread.split()[0])
    if spread != "assigned" and (number is None or isinstance(spread, bool) or not number > 0):
        fault(place, f"spread: '{spread}' is neither a number above 0 nor 'assigned'")


def check_constant(place, entry):
    check_spread(place, entry)
    for key in ("log10_k", "temperature", "ionic_strength", "medium", "where"):
        if key not in entry:
            fault(place, f"{key} is missing")
    if not isinstance(entry.get("log10_k"), (int, float)):
        fault(place, "log10_k is not a number")


def check_reaction(place, entry, known, own, side, other=()):
    """The entry's own name must stand on `side` (0 left, 1 right) with coefficient 1, the rest must be known."""
    try:
        sides = parse_reaction(str(entry.get("reaction", "")))
    except ValueError as why:
        return fault(place, f"reaction: {why}")
    if [c for c, n in sides[side] if n == own] != [1.0] or any(n == own for _, n in sides[1 - side]):
        fault(place, f"reaction: '{own}' must stand once, with coefficient 1, on the {('left', 'right')[side]}")
    for _, name in sides[0] + sides[1]:
        if name != own and name not in known and name not in other:
            fault(place, f"reaction: '{name}' is no component or species")
    check_balance(place + " reaction", sides)


def check_paths(species, components):
    """Every species must come down to components without going in a ring."""
    needs = {}
    for place, entry in species:
        try:
            left, right = parse_reaction(str(entry["reaction"]))
        except (KeyError, ValueError):
            continue
        needs[entry["name"]] = (place, {n for _, n in left + right} - {entry["name"]} - components)
    done = False
    while not done:
        ready = [name for name, (_, rest) in needs.items() if not rest & needs.keys()]
        for name in ready:
            del needs[name]
        done = not ready
    for name, (place, rest) in needs.items():
        fault(place, f"'{name}' does not come down to components (by way of {sorted(rest)})")


def load(folder, name):
    try:
        with open(os.path.join(folder, name), encoding="utf-8") as file:
            text = file.read()
        if not text.startswith("#"):
            fault(name, "no leading comment")
        return yaml.load(text, UniqueKeys) or {}
    except (OSError, yaml.YAMLError) as why:
        fault(name, str(why))
        return {}


def check_library(folder):
    sources = load(folder, "sources.yaml").get("sources", {})
    for key, entry in sources.items():
        for word in ("title", "authors", "year"):
            if word not in entry:
                fault(f"sources.yaml {key}", f"{word} is missing")

    entries, counts, used = {}, {}, set()
    for name, lists in LISTS.items():
        document = load(folder, name)
        for single in SINGLES.get(name, []):
            check_provenance(f"{name} {single}", document.get(single) or {}, sources, used)
        for key in lists:
            entries[key] = [(f"{name} {e.get('name') or e.get('element') or e.get('substance') or e.get('temperature')}", e)
                            for e in document.get(key) or []]
            counts[f"{name} {key}"] = len(entries[key])
            if not entries[key]:
                fault(name, f"{key} is empty")
        for key in set(document) - set(lists) - set(SINGLES.get(name, [])):
            fault(name, f"unknown key '{key}'")
    species, species_folder = [], os.path.join(folder, "species")
    for name in sorted(os.listdir(species_folder)) if os.path.isdir(species_folder) else []:
        found = load(folder, f"species/{name}").get("species") or []
        species += [(f"species/{name} {e.get('name')}", e) for e in found]
        counts[f"species/{name}"] = len(found)

    for key, listed in list(entries.items()) + [("species", species)]:
        for place, entry in listed:
            check_quantities(place, entry)
            if key != "components":
                check_provenance(place, entry, sources, used)

    # names
    taken = {}
    for key, listed in [(k, entries[k]) for k in ("components", "solids", "minerals", "gases")] + [("species", species)]:
        for place, entry in listed:
            if entry.get("name") in taken:
                fault(place, f"the name is taken by {taken[entry['name']]}")
            taken[entry.get("name")] = place
    for key, word in (("components", "total_name"), ("density_salts", "name"), ("ionic_volumes", "name"), ("atomic_weights", "element")):
        seen = [e.get(word) for _, e in entries[key]]
        for double in {n for n in seen if seen.count(n) > 1}:
            fault(key, f"{word} '{double}' is given twice")

    # components
    components = {e["name"] for _, e in entries["components"]}
    for place, entry in entries["components"]:
        if entry.get("role") not in ROLES:
            fault(place, f"role '{entry.get('role')}' is not one of {sorted(ROLES)}")
        if entry.get("role") == "metal" and "element_state" not in entry:
            fault(place, "element_state is missing")
        if entry.get("role") == "ligand" and "family" not in entry:
            fault(place, "family is missing")

    # species, solids, minerals, gases
    known = components | {e.get("name") for _, e in species}
    for place, entry in species:
        check_constant(place, entry)
        check_reaction(place, entry, known, entry.get("name"), 1)
    check_paths(species, components)
    for place, entry in entries["solids"]:
        check_constant(place, entry)
        check_reaction(place, entry, known, entry.get("formula"), 0)
        if entry.get("forms") not in ("readily", "slowly"):
            fault(place, "forms is neither readily nor slowly")
        for word in ("forms_evidence", "density", "density_source", "density_evidence"):
            if word not in entry:
                fault(place, f"{word} is missing")
    for place, entry in entries["minerals"]:
        if "density" not in entry:
            fault(place, "density is missing")
    for place, entry in entries["gases"]:
        check_spread(place, entry)
        check_reaction(place, entry, known, entry.get("name"), 0)
        if ("henry" in entry) == ("log10_k" in entry):
            fault(place, "either henry or log10_k is needed")
    for place, entry in entries["ionic_volumes"]:
        check_spread(place, entry)
        if entry.get("name") not in known:
            fault(place, "no component or species of that name")
    for place, entry in entries["air_limits"]:
        for word in ("kind", "value", "body", "year", "use"):
            if word not in entry:
                fault(place, f"{word} is missing")
        if entry.get("use") and entry.get("evidence") != "published":
            fault(place, "an entry not published may not be used as a limit")

    # every element has a weight
    weights = {e.get("element") for _, e in entries["atomic_weights"]}
    formulas = [(p, e.get("name")) for p, e in species + entries["components"] + entries["density_salts"]]
    formulas += [(p, e.get("formula")) for p, e in entries["solids"] + entries["minerals"]]
    for place, formula in formulas:
        try:
            for element in set(parse_formula(str(formula))[0]) - weights:
                fault(place, f"no atomic weight of '{element}'")
        except ValueError as why:
            fault(place, f"'{formula}' is not a formula: {why}")

    for key in sorted(set(sources) - used):
        fault("sources.yaml", f"'{key}' is used by no entry")
    return counts


def main():
    here = os.path.dirname(os.path.abspath(__file__))
    folder = sys.argv[1] if len(sys.argv) > 1 else os.path.join(here, "..", "models", "data")
    counts = check_library(folder)
    for line in faults:
        print(line)
    if faults:
        print(f"{len(faults)} faults")
        return 1
    print(", ".join(f"{name}: {n}" for name, n in counts.items()))
    return 0


if __name__ == "__main__":
    sys.exit(main())
