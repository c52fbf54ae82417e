"""What a campaign costs beside its cases: rate with every core against one case after the other in the same run, and memory.

usage: /usr/bin/python3 campaign_rate.py LEAT_BINARY [--cases 60] [--rounds 3] [--memory 1000]

Turn by turn, so that what else the machine does falls on both:
  one:  one worker; the sum of the seconds of its cases is what the cases alone take
  all:  a worker a core; from the first case to the last row, the start of the program included
efficiency = (cases / time of all) / (cores * cases / seconds of the cases alone); nothing is asserted. Where other programs
run, two figures that do not depend on them: by processor time, one against all; and how much of the time of `all` its workers
had a case.
"""
import argparse
import os
import re
import shutil
import sqlite3
import statistics
import subprocess
import sys
import tempfile
import time

TREE = os.path.dirname(os.path.dirname(os.path.dirname(os.path.abspath(__file__))))
CAMPAIGN = """leat: 1
kind: campaign
title: rate of a campaign, invented
of: case.yaml
vary:
  streams.wash.rate: 3 m3/h to 6 m3/h in {rates} points
  streams.ammonia.rate: 1.3 t/h to 1.6 t/h in {doses} points
watch: [recovery.Ag, recovery.Cu, reagent_consumption.ammonia, ph.L.1]
rank: {{by: recovery.Ag, best: largest}}
through_time: {through}
"""


def resident(process):
    """Memory a process holds, and the part of it that is its own [MB]."""
    try:
        with open(f"/proc/{process}/status", encoding="utf-8") as file:
            text = file.read()
    except OSError:
        return None
    found = {name: int(value) for name, value in re.findall(r"^(VmRSS|RssAnon):\s+(\d+) kB", text, re.M)}
    return (found["VmRSS"] / 1024, found["RssAnon"] / 1024) if len(found) == 2 else None


def children(parent):
    found = []
    for name in os.listdir("/proc"):
        if name.isdigit():
            try:
                with open(f"/proc/{name}/stat", encoding="utf-8", errors="replace") as file:
                    if int(file.read().rsplit(")", 1)[1].split()[1]) == parent:
                        found.append(int(name))
            except OSError:
                pass
    return found


class Run:
    """One campaign in a folder of its own: wall time, processor time, seconds of its cases, memory as it went."""

    def __init__(self, leat, cases, through, workers=None, watch_memory=False):
        self.memory = []
        with tempfile.TemporaryDirectory(prefix="leat_rate_") as folder:
            shutil.copy(os.path.join(TREE, "flowsheets", "1_ammine_residue.yaml"), os.path.join(folder, "case.yaml"))
            with open(os.path.join(folder, "c.yaml"), "w", encoding="utf-8") as file:
                file.write(CAMPAIGN.format(rates=cases // 10, doses=10, through="true" if through else "false"))
            words = [leat, "campaign", "c.yaml"] + (["--workers", str(workers)] if workers else [])
            begin = time.monotonic()
            run = subprocess.Popen(words, cwd=folder, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
            while watch_memory and run.poll() is None:
                self.memory.append((time.monotonic() - begin, resident(run.pid), [resident(one) for one in children(run.pid)]))
                time.sleep(1)
            _, status, used = os.wait4(run.pid, 0) if not watch_memory else (0, run.returncode, None)
            self.wall = time.monotonic() - begin
            self.processor = used.ru_utime + used.ru_stime if used else float("nan")
            if status != 0:
                sys.exit(f"the campaign ended with {status}")
            database = sqlite3.connect(os.path.join(folder, "outputs", "c.ledger"))
            self.alone, self.cases, self.done = database.execute("SELECT sum(seconds), count(*), sum(status = 'done') FROM cases").fetchone()
            database.close()


def rate(leat, cases, rounds, through):
    cores = len(os.sched_getaffinity(0))
    pairs = [(Run(leat, cases, through, workers=1), Run(leat, cases, through)) for _ in range(rounds)]
    what = "through time" if through else "steady only"
    for one, every in pairs:
        print(f"{what}: {one.cases} cases, {one.done} done; one after the other {one.alone:.2f} s ({one.cases / one.alone:.2f} cases/s); {cores} cores "
              f"{every.wall:.2f} s ({every.cases / every.wall:.2f} cases/s): {one.alone / every.wall / cores:.1%}; workers busy {every.alone / every.wall / cores:.1%}; processor {one.processor:.2f} s and {every.processor:.2f} s")
    print(f"{what}: efficiency {statistics.median(one.alone / every.wall / cores for one, every in pairs):.1%} of {cores} cores, by processor time "
          f"{statistics.median(one.processor / every.processor for one, every in pairs):.1%}, workers busy "
          f"{statistics.median(every.alone / every.wall / cores for _, every in pairs):.1%} (medians of {rounds})")


def memory(leat, cases):
    run = Run(leat, cases, False, watch_memory=True)
    seen = [(at, parent, [one for one in workers if one]) for at, parent, workers in run.memory if parent and all(workers)]
    print(f"memory over {run.cases} cases ({run.done} done) in {run.wall:.0f} s, resident and (own) in MB:")
    for k in range(0, 11):
        at, parent, workers = seen[k * (len(seen) - 1) // 10]
        print(f"  after {at:6.1f} s: command {parent[0]:.1f} ({parent[1]:.1f}); workers " + ", ".join(f"{all_:.1f} ({own:.1f})" for all_, own in workers))


def main():
    words = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    words.add_argument("leat")
    words.add_argument("--cases", type=int, default=60, help="of a campaign whose rate is taken, in tens")
    words.add_argument("--rounds", type=int, default=3)
    words.add_argument("--memory", type=int, default=1000, help="cases over which memory is watched; 0: none")
    given = words.parse_args()
    leat = os.path.abspath(given.leat)
    for through in (False, True):
        rate(leat, given.cases, given.rounds, through)
    if given.memory:
        memory(leat, given.memory)


if __name__ == "__main__":
    main()
