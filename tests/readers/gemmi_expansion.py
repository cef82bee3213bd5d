#!/usr/bin/env python3
"""Writes tests/data/gemmi_expansion.tsv: atoms in the cell (sum of occupancies) of each CIF, as gemmi expands it.

usage: gemmi_expansion.py FOLDER > tests/data/gemmi_expansion.tsv
"""
import sys
from pathlib import Path

import gemmi

print(f"# Sum of the occupancies of all sites in the cell, from gemmi {gemmi.__version__} (SmallStructure.get_all_unit_cell_sites).")
print("#file\tatoms")
for path in sorted(Path(sys.argv[1]).glob("*.cif")):
    for block in gemmi.cif.read(str(path)):
        small = gemmi.make_small_structure_from_block(block)
        if small.sites:
            print(f"{path.name}\t{sum(site.occ for site in small.get_all_unit_cell_sites()):.5f}")
