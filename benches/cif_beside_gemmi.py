"""File to typed sites, ours and gemmi's in turn on one file of 1,000,000 atoms; medians of the rounds in MB/s.

Run at the top of the project with the Python of tests/readers/install.sh:
    target/readers/bin/python benches/cif_beside_gemmi.py [ROUNDS]
"""

import os
import re
import statistics
import subprocess
import sys
import tempfile
import time

import gemmi


def ours(folder):
    command = ["cargo", "bench", "--quiet", "--bench", "cif", "--", "--million", folder]
    text = subprocess.run(command, capture_output=True, text=True, check=True).stdout
    return [float(rate) for rate in re.findall(r"([\d.]+) MB(?:/s| for)", text)]


def theirs(path):
    size = os.path.getsize(path) / 1e6
    started = time.perf_counter()
    document = gemmi.cif.read_file(path)
    tokens = time.perf_counter()
    structure = gemmi.make_small_structure_from_block(document.sole_block())
    done = time.perf_counter()
    assert len(structure.sites) == 1_000_000
    return [size / (tokens - started), size / (done - started)]


rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 5
with tempfile.TemporaryDirectory() as folder:
    print("written: %.0f MB/s" % ours(folder)[0])
    path = os.path.join(folder, "million.cif")
    rows = [ours(folder) + theirs(path) for _ in range(rounds)]
names = ["tokens", "file to checked structure", "peak memory, MB", "gemmi: file to tokens", "gemmi: file to sites"]
middle = [statistics.median(column) for column in zip(*rows)]
for name, value in zip(names, middle):
    print(f"{name}: {value:.0f}")
print(f"ours / gemmi, file to sites: {middle[1] / middle[4]:.2f}")
