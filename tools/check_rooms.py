#!/usr/bin/env python3
"""Checks the walls of the house: every #include of models/, sim/ and tools/ against the floor table of DEVELOPERS.md.

usage: check_rooms.py [--root TREE] [--table FILE] [--quiet]
       check_rooms.py --self-test

The table is the fenced block marked ```floors, a line `FLOOR ROOM` each; --table reads it from another file, fenced or bare.
A line `private HEADER` names a header that only its own room includes; it may carry the headers of the room's library.
A broken rule is a line FILE:LINE and ends with 1:
  - a file includes from its own room and from lower floors, never from a neighbour on its floor nor from above
  - models includes neither sim nor tools, sim not tools
  - models/activity, models/rates and models/units are included by models/register alone, the register and the doors
    (sim/input, sim/results) by tools alone
  - the headers of a library stand in .cpp files of its host room alone; Eigen and fmt are guests everywhere
Files and functions past their length are told and end with 0.
"""
import argparse
import os
import re
import sys
import tempfile

TOPS = ("models", "sim", "tools")
HEADER_LINES, SOURCE_LINES, FUNCTION_LINES = 150, 400, 60

# Who alone may include a room, besides the room itself.
ONLY_BY = {
    "models/activity": "models/register", "models/rates": "models/register", "models/units": "models/register",
    "models/register": "tools", "sim/input": "tools", "sim/results": "tools",
}

# (library, beginning of its headers, host room; None: everywhere, headers too)
LIBRARIES = [
    ("Eigen", r"Eigen/", None), ("fmt", r"fmt/", None),
    ("UDUNITS", r"udunits2?\.h|converter\.h", "models/core"),
    ("SUNDIALS", r"(sundials|kinsol|cvodes?|ida[s]?|arkode|nvector|sunmatrix|sunlinsol|sunnonlinsol)/", "sim/numerics"),
    ("yaml-cpp", r"yaml-cpp/", "sim/input"),
    ("HDF5", r"hdf5(_hl)?\.h|H5\w*\.h", "sim/results"),
    ("CLI11", r"CLI/", "tools/leat"), ("spdlog", r"spdlog/", "tools/leat"),
    ("SQLite", r"sqlite3\.h", "sim/study"), ("xxHash", r"xxhash\.h", "sim/study"), ("NLopt", r"nlopt\.h(pp)?", "sim/study"), ("GSL", r"gsl/", "sim/study"),
    ("JSON", r"nlohmann/", "sim/results"), ("xlsxwriter", r"xlsxwriter\.h", "sim/results"),
]
SYSTEM = r"[a-z_0-9]+|(assert|ctype|errno|fcntl|fenv|float|inttypes|limits|locale|math|poll|pthread|pwd|sched|setjmp|signal|stdarg|stddef|stdint|" \
         r"stdio|stdlib|string|termios|time|unistd|wchar)\.h|sys/\w+\.h"


# The table ----------------------------------------------------------------------------------------------------------

def read_table(path):
    """{room: floor} and the set of private headers; raises ValueError with the line at fault."""
    with open(path, encoding="utf-8") as file:
        lines = file.read().splitlines()
    begin = next((k for k, line in enumerate(lines) if line.strip() == "```floors"), None)
    fenced = begin is not None
    if not fenced and path.endswith(".md"):
        raise ValueError(f"{path}:1: no block marked ```floors")
    rooms, private = {}, set()
    for number, line in enumerate(lines, 1):
        if fenced and number <= begin + 1:
            continue
        if line.startswith("```"):
            break
        words = line.split("#")[0].split()
        if not words:
            continue
        if len(words) == 2 and words[0] == "private" and words[1].endswith(".hpp"):
            private.add(words[1])
            continue
        if len(words) != 2 or not re.fullmatch(r"\d+", words[0]) or words[1].split("/")[0] not in TOPS:
            raise ValueError(f"{path}:{number}: '{line}' is not a floor and a room, such as '1 models/core'")
        if words[1] in rooms:
            raise ValueError(f"{path}:{number}: the room {words[1]} stands in the table already")
        rooms[words[1]] = int(words[0])
    if not rooms:
        raise ValueError(f"{path}:1: the table of floors is empty")
    return rooms, private


def room_of(path, rooms):
    """The room of the table that holds a path, or the folder it would be in."""
    folder = os.path.dirname(path)
    while folder and folder not in rooms:
        folder = os.path.dirname(folder)
    return folder or "/".join(os.path.dirname(path).split("/")[:2])


# The text -----------------------------------------------------------------------------------------------------------

def without_comments(text):
    """The text with comments and the insides of literals as blanks; line breaks stay."""
    pattern = r'R"(\w*)\(.*?\)\1"|"(?:\\.|[^"\\\n])*"|\'(?:\\.|[^\'\\\n])+\'|//[^\n]*|/\*.*?\*/'

    def blank(found):
        whole = found.group()
        if whole.startswith("'") and found.start() > 0 and text[found.start() - 1].isdigit():
            return whole  # a digit separator
        return re.sub(r"[^\n]", " ", whole)

    return re.sub(pattern, blank, text, flags=re.S)


def includes(text):
    """(line number, name, whether in quotes) of each #include; those in comments do not count."""
    bare = without_comments(text).splitlines()
    found = []
    for number, line in enumerate(text.splitlines(), 1):
        read = re.match(r'\s*#\s*include\s*(<([^>]+)>|"([^"]+)")', line)
        if read and number <= len(bare) and re.match(r"\s*#\s*include", bare[number - 1]):
            found.append((number, read.group(2) or read.group(3), read.group(3) is not None))
    return found


def functions(text):
    """(line of its opening brace, lines, name) of each function body."""
    bare = re.sub(r"^[ \t]*#.*$", "", without_comments(text), flags=re.M)
    stack, found, head = [], [], ""
    line = 1
    for sign in bare:
        if sign == "\n":
            line += 1
        if sign == "{":
            inside = any(kind == "function" for kind, _, _ in stack)
            kind = "block"
            if not inside and ")" in head and not re.match(r"\s*(enum|namespace)\b", head):
                kind = "function"
            stack.append((kind, line, name_of(head)))
            head = ""
        elif sign == "}":
            if stack:
                kind, begin, name = stack.pop()
                if kind == "function":
                    found.append((begin, line - begin + 1, name))
            head = ""
        elif sign == ";":
            head = ""
        else:
            head += sign
    return found


def name_of(head):
    read = re.search(r"([~\w:]+|operator\s*\S+)\s*\(", head)
    return read.group(1) if read else "?"


# The rules ----------------------------------------------------------------------------------------------------------

class Checker:
    def __init__(self, root, rooms, private=()):
        self.root, self.rooms, self.private = root, rooms, private
        self.faults, self.warnings = [], []
        self.files = self.count = 0

    def run(self):
        for path in self.sources():
            self.files += 1
            with open(os.path.join(self.root, path), encoding="utf-8") as file:
                text = file.read()
            self.check_includes(path, text)
            self.check_length(path, text)
        for room in self.rooms:
            if not os.path.isdir(os.path.join(self.root, room)):
                self.warnings.append(f"{room}: stands in the table of floors, and there is no such folder")
        for header in self.private:
            if not os.path.exists(os.path.join(self.root, header)):
                self.faults.append(f"{header}:1: stands in the table as private, and is not there")
        return not self.faults

    def sources(self):
        found = []
        for top in TOPS:
            for folder, _, names in os.walk(os.path.join(self.root, top)):
                found += [os.path.relpath(os.path.join(folder, name), self.root) for name in names
                          if name.endswith((".cpp", ".hpp", ".h", ".cc", ".hpp.in", ".cpp.in", ".ipp"))]
        return sorted(path.replace(os.sep, "/") for path in found)

    def check_includes(self, path, text):
        room = room_of(path, self.rooms)
        if room not in self.rooms:
            self.faults.append(f"{path}:1: the room {room} has no floor in the table")
        for line, name, quoted in includes(text):
            self.count += 1
            where = f"{path}:{line}"
            if name.split("/")[0] in TOPS:
                self.check_arrow(where, room, name)
            elif quoted:
                self.faults.append(f"{where}: '{name}': write the path from the top, such as \"models/core/quantity.hpp\"")
            else:
                self.check_library(where, room, name, path)

    def check_arrow(self, where, room, name):
        to = room_of(name, self.rooms)
        if not os.path.exists(os.path.join(self.root, name)):
            return self.faults.append(f"{where}: '{name}' is not there")
        if to == room:
            return None
        top, to_top = room.split("/")[0], to.split("/")[0]
        if TOPS.index(to_top) > TOPS.index(top):
            return self.faults.append(f"{where}: {top} never includes {to_top} ({name})")
        if name in self.private:
            return self.faults.append(f"{where}: {name} is private to {to}")
        only = ONLY_BY.get(to)
        if only and room != only and not room.startswith(only + "/"):
            return self.faults.append(f"{where}: {to} is included by {only} alone, not by {room} ({name})")
        if to not in self.rooms:
            return self.faults.append(f"{where}: the room {to} has no floor in the table ({name})")
        floor, to_floor = self.rooms.get(room), self.rooms[to]
        if floor is not None and to_floor >= floor:
            kind = "a neighbour on the same floor" if to_floor == floor else "above"
            self.faults.append(f"{where}: {room} (floor {floor}) includes from {to} (floor {to_floor}), {kind} ({name})")
        return None

    def check_library(self, where, room, name, path):
        for library, pattern, host in LIBRARIES:
            if not re.match(f"(?:{pattern})", name):
                continue
            if host and room != host:
                self.faults.append(f"{where}: {library} is the guest of {host} alone, not of {room} (<{name}>)")
            elif host and not path.endswith(".cpp") and path not in self.private:
                self.faults.append(f"{where}: headers of {library} stand in .cpp files alone (<{name}>)")
            return
        if not re.fullmatch(SYSTEM, name):
            self.faults.append(f"{where}: <{name}> is of a library without a host room")

    def check_length(self, path, text):
        lines = text.count("\n") + (not text.endswith("\n"))
        limit = SOURCE_LINES if path.endswith(".cpp") else HEADER_LINES
        if lines > limit:
            self.warnings.append(f"{path}:{limit + 1}: {lines} lines, more than {limit}")
        for line, length, name in functions(text):
            if length > FUNCTION_LINES:
                self.warnings.append(f"{path}:{line}: {name} has {length} lines, more than {FUNCTION_LINES}")


# Its own test -------------------------------------------------------------------------------------------------------

TABLE = "1 models/core\n2 models/chemistry\n4 models/rates\n4 models/units\n5 models/register\n6 sim/numerics\n" \
        "8 sim/circuit\n11 sim/input\n11 sim/results\n12 tools/leat\n"
GOOD = {
    "models/core/a.hpp": "#pragma once\n#include <vector>\n", "models/core/a.cpp": '#include "models/core/a.hpp"\n#include <udunits2.h>\n#include <fmt/format.h>\n',
    "models/chemistry/b.hpp": '#include <Eigen/Dense>\n#include "models/core/a.hpp"\n// #include "sim/circuit/e.hpp"\n/*\n#include "sim/circuit/e.hpp"\n*/\n',
    "models/rates/c.hpp": '#include "models/chemistry/b.hpp"\n', "models/units/u.hpp": '#include "models/chemistry/b.hpp"\n',
    "models/register/r.hpp": '#include "models/rates/c.hpp"\n#include "models/units/u.hpp"\n',
    "sim/numerics/d.cpp": "#include <kinsol/kinsol.h>\n#include <sys/stat.h>\n#include <unistd.h>\n", "sim/numerics/d.hpp": "",
    "sim/circuit/e.hpp": '#include "sim/numerics/d.hpp"\n#include "models/core/a.hpp"\n',
    "sim/input/f.hpp": '#include "sim/circuit/e.hpp"\n', "sim/input/f.cpp": "#include <yaml-cpp/yaml.h>\n",
    "sim/results/g.hpp": "", "sim/results/g.cpp": "#include <hdf5.h>\n#include <hdf5_hl.h>\n",
    "tools/leat/main.cpp": '#include <CLI/CLI.hpp>\n#include "sim/input/f.hpp"\n#include "sim/results/g.hpp"\n#include "models/register/r.hpp"\n',
}
FAULTS = [  # file, line planted at its top, piece of what must be told
    ("models/core/a.hpp", '#include "models/chemistry/b.hpp"', "above"),
    ("models/rates/c.hpp", '#include "models/units/u.hpp"', "models/register alone"),
    ("models/chemistry/b.hpp", '#include "sim/numerics/d.hpp"', "models never includes sim"),
    ("models/chemistry/b.hpp", '#include "tools/leat/main.cpp"', "models never includes tools"),
    ("sim/circuit/e.hpp", '#include "tools/leat/main.cpp"', "sim never includes tools"),
    ("sim/circuit/e.hpp", '#include "models/rates/c.hpp"', "models/register alone"),
    ("tools/leat/main.cpp", '#include "models/units/u.hpp"', "models/register alone"),
    ("sim/circuit/e.hpp", '#include "models/register/r.hpp"', "tools alone"),
    ("sim/results/g.hpp", '#include "sim/input/f.hpp"', "tools alone"),
    ("sim/numerics/d.hpp", '#include "sim/circuit/e.hpp"', "above"),
    ("sim/circuit/e.hpp", '  #  include  "sim/input/f.hpp"', "tools alone"),
    ("sim/circuit/e.hpp", '#include "e.hpp"', "path from the top"),
    ("sim/circuit/e.hpp", '#include "sim/numerics/gone.hpp"', "not there"),
    ("models/chemistry/b.hpp", "#include <udunits2.h>", "UDUNITS"),
    ("sim/circuit/e.hpp", "#include <cvodes/cvodes.h>", "SUNDIALS"),
    ("sim/numerics/d.hpp", "#include <sundials/sundials_types.h>", ".cpp files alone"),
    ("sim/results/g.cpp", "#include <yaml-cpp/yaml.h>", "yaml-cpp"),
    ("tools/leat/main.cpp", "#include <hdf5.h>", "HDF5"),
    ("sim/input/f.cpp", "#include <CLI/CLI.hpp>", "CLI11"),
    ("models/core/a.cpp", "#include <boost/any.hpp>", "without a host"),
    ("sim/attic/h.hpp", "#pragma once", "no floor"),
]


def plant(root, files):
    for name, text in files.items():
        path = os.path.join(root, name)
        os.makedirs(os.path.dirname(path), exist_ok=True)
        with open(path, "w", encoding="utf-8") as file:
            file.write(text)


def look(files, table=TABLE):
    with tempfile.TemporaryDirectory(prefix="leat_rooms_") as root:
        plant(root, files)
        plant(root, {"DEVELOPERS.md": f"# House\n\n```floors\n{table}```\n\n```sh\n1 not/a/room\n```\n"})
        checker = Checker(root, *read_table(os.path.join(root, "DEVELOPERS.md")))
        checker.run()
        return checker


def self_test():
    wrong = []
    good = look(GOOD)
    if good.faults or good.warnings:
        wrong.append(f"a good tree is refused: {good.faults + good.warnings}")
    for path, line, piece in FAULTS:
        text = GOOD.get(path, "")
        told = look({**GOOD, path: f"{line}\n{text}"}).faults
        if len(told) != 1 or not told[0].startswith(f"{path}:1: ") or piece not in told[0]:
            wrong.append(f"planted '{line}' in {path}: told {told}")
    neighbours = look({**GOOD, "sim/circuit/e.hpp": '#include "sim/numerics/d.hpp"\n'}, TABLE.replace("8 sim/circuit", "6 sim/circuit")).faults
    if len(neighbours) != 1 or "same floor" not in neighbours[0]:
        wrong.append(f"a neighbour on the same floor: told {neighbours}")
    carries = {**GOOD, "sim/numerics/own.hpp": "#include <cvodes/cvodes.h>\n"}
    if look(carries, TABLE + "private sim/numerics/own.hpp\n").faults or len(look(carries).faults) != 1:
        wrong.append("a private header may carry the library of its room, any other may not")
    outside = {**carries, "sim/circuit/e.hpp": '#include "sim/numerics/own.hpp"\n'}
    told = look(outside, TABLE + "private sim/numerics/own.hpp\n").faults
    if len(told) != 1 or "private to sim/numerics" not in told[0]:
        wrong.append(f"a private header included from outside: told {told}")
    body = "".join(f"  int x{k} = {k};  // }}\n" for k in range(70))
    long = look({**GOOD, "sim/numerics/d.cpp": f"namespace leat {{\nint f(int a) {{\n{body}  return a;\n}}\nint g() {{ return '}}'; }}\n}}\n" + "\n" * 400,
                 "sim/numerics/d.hpp": "\n" * 151})
    if long.faults or len(long.warnings) != 3 or not any("d.cpp:2: f has 73 lines" in one for one in long.warnings):
        wrong.append(f"long files and functions: told {long.faults} {long.warnings}")
    for table in ("", "models/core\n", "1 core\n", "1 models/core\n2 models/core\n"):
        try:
            look(GOOD, table)
            wrong.append(f"the table {table!r} is taken")
        except ValueError:
            pass
    for line in wrong:
        print(line)
    print(f"self-test: {len(FAULTS) + 9 - len(wrong)} of {len(FAULTS) + 9} as expected")
    return 1 if wrong else 0


def main():
    here = os.path.dirname(os.path.abspath(__file__))
    words = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    words.add_argument("--root", default=os.path.dirname(here))
    words.add_argument("--table", help="file with the table of floors; default DEVELOPERS.md of the tree")
    words.add_argument("--quiet", action="store_true", help="no warnings")
    words.add_argument("--self-test", action="store_true")
    given = words.parse_args()
    if given.self_test:
        return self_test()
    try:
        rooms, private = read_table(given.table or os.path.join(given.root, "DEVELOPERS.md"))
    except (OSError, ValueError) as why:
        print(why)
        return 1
    checker = Checker(given.root, rooms, private)
    checker.run()
    for line in checker.faults:
        print(line)
    if not given.quiet:
        for line in checker.warnings:
            print(f"warning: {line}")
    print(f"{checker.files} files, {checker.count} includes, {len(rooms)} rooms: {len(checker.faults)} faults, {len(checker.warnings)} warnings")
    return 1 if checker.faults else 0


if __name__ == "__main__":
    sys.exit(main())
