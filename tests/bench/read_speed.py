#!/usr/bin/python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Reading speed side by side: read_speed against the C engine of pandas on one and the same file.

usage: read_speed.py PATH-TO-read_speed [MEGABYTES] [REPEATS]

Both run pinned to one processor, in turn, and the best of the repeats counts. Fails when this
program reads fewer than 200 MB/s or less than 1.5 times as fast as pandas, or needs more than three
times the memory of the numbers."""
import os
import re
import subprocess
import sys
import tempfile
import time

import pandas

program, mb, repeats = sys.argv[1], float((sys.argv[2:] or [100])[0]), int((sys.argv[3:] or [5])[0])
os.sched_setaffinity(0, {min(os.sched_getaffinity(0))})
with tempfile.TemporaryDirectory() as room:
    path = os.path.join(room, "run.csv")
    subprocess.run([program, path, str(mb), "1"], check=True, capture_output=True)
    ours = theirs = float("inf")
    memory = 0.0
    size = os.path.getsize(path) / 1e6
    for _ in range(repeats):
        out = subprocess.run([program, path, "0", "2"], check=True, capture_output=True, text=True).stdout
        ours = min(ours, float(re.search(r"([\d.]+) s,", out).group(1)))
        memory = max(memory, float(re.search(r"([\d.]+) times", out).group(1)))
        begin = time.perf_counter()
        table = pandas.read_csv(path, engine="c")
        theirs = min(theirs, time.perf_counter() - begin)
        assert len(table.columns) == 3
print(f"{size:.0f} MB: chainend {size / ours:.0f} MB/s, pandas {pandas.__version__} {size / theirs:.0f} MB/s, "
      f"ratio {theirs / ours:.2f}, memory {memory:.2f} times the numbers")
sys.exit(not (size / ours >= 200 and theirs / ours >= 1.5 and memory <= 3))
