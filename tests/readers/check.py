"""Opens CIFs in readers that are not ours and compares what they find with what we say.

usage: check.py INTERSTICE FILE.cif ...

gemmi and PyCifRW read every file; spglib confirms the space group; cifparse and ddlm_validate (Debian package cod-tools)
judge the syntax and, when the folder named by INTERSTICE_CIF_DICTIONARY holds the core dictionary, the names and values.
Exits 1 on any disagreement. A validator that is not installed is told in one line; with CI=true that is a failure.
"""

import json
import os
import shutil
import subprocess
import sys

failures = []


def fail(path, text):
    failures.append(f"{path}: {text}")


def missing(what):
    print(f"not checked with {what}: not installed")
    if os.environ.get("CI") == "true":
        failures.append(f"{what} is missing")


def with_gemmi(path, said):
    import gemmi
    import numpy

    block = gemmi.cif.read_file(path).sole_block()
    small = gemmi.make_small_structure_from_block(block)
    group = small.spacegroup
    number = group.number if group else 0
    if number != int(block.find_value("_space_group_IT_number")):
        fail(path, f"gemmi takes space group {number}")
    listed = len(block.find_loop("_space_group_symop_operation_xyz"))
    if group and len(list(group.operations())) != listed:
        fail(path, f"gemmi's group has {len(list(group.operations()))} operations, the file lists {listed}")
    atoms = small.get_all_unit_cell_sites()
    # Sites that share a position count once.
    places = []
    for atom in atoms:
        for place in places:
            d = numpy.array([atom.fract.x, atom.fract.y, atom.fract.z]) - place
            if numpy.abs(d - numpy.round(d)).max() < 1e-4:
                break
        else:
            places.append(numpy.array([atom.fract.x, atom.fract.y, atom.fract.z]))
    if len(places) != said["sites"]:
        fail(path, f"gemmi finds {len(places)} sites in the cell, we say {said['sites']}")
    volume = float(block.find_value("_cell_volume"))
    if abs(small.cell.volume - volume) > 1e-3:
        fail(path, f"gemmi's volume {small.cell.volume}, the file's {volume}")
    weight = sum(a.element.weight * a.occ for a in atoms)
    density = weight * 1.66053906660 / small.cell.volume
    # gemmi's atomic weights and ours agree to about 1e-3 for a few elements.
    if abs(density / float(block.find_value("_exptl_crystal_density_diffrn")) - 1) > 2e-3:
        fail(path, f"density by gemmi {density}")
    matrix = numpy.array(small.cell.orth.mat.tolist())
    near = numpy.array([[i, j, k] for i in (-1, 0, 1) for j in (-1, 0, 1) for k in (-1, 0, 1)])
    shortest = numpy.inf
    for n, place in enumerate(places):
        gaps = numpy.array(places)[:, None, :] - place + near[None, :, :]
        lengths = numpy.linalg.norm(gaps @ matrix.T, axis=2)
        lengths[n, 13] = numpy.inf
        shortest = min(shortest, lengths.min())
    if said["shortest"] and abs(shortest - said["shortest"]) > 2e-3:
        fail(path, f"shortest distance {shortest:.4f} by gemmi's cell, {said['shortest']:.4f} by us")
    return small, atoms, number


def with_spglib(path, small, atoms, number):
    import numpy
    import spglib

    if any(a.occ < 1 for a in atoms):
        return None
    lattice = numpy.array(small.cell.orth.mat.tolist()).T
    positions = [[a.fract.x, a.fract.y, a.fract.z] for a in atoms]
    kinds = [a.element.atomic_number * 20 + int(a.charge) for a in atoms]
    cell = (lattice, positions, kinds)
    found = spglib.get_symmetry_dataset(cell, symprec=1e-3)
    if found.number != number and number != 1:
        fail(path, f"spglib finds space group {found.number}, the file says {number}")
    return found.number, spectrum(spglib.standardize_cell(cell, to_primitive=True, no_idealize=True, symprec=1e-3))


REACH = 5.0  # A


def spectrum(cell):
    """Distances up to REACH in a primitive cell, sorted, for each pair of kinds; None for a large cell."""
    import numpy

    lattice, positions, kinds = cell
    if len(kinds) > 250:
        return None
    n = numpy.ceil(REACH * numpy.linalg.norm(numpy.linalg.inv(lattice), axis=0)).astype(int) + 1
    shifts = numpy.array(numpy.meshgrid(*[range(-k, k + 1) for k in n])).reshape(3, -1).T
    found = {}
    for position, kind in zip(positions, kinds):
        lengths = numpy.linalg.norm((positions - position + shifts[:, None, :]) @ lattice, axis=2)
        for other in set(kinds):
            near = lengths[:, kinds == other]
            found.setdefault((kind, other), []).extend(near[(near > 1e-3) & (near < REACH)])
    return {pair: numpy.sort(near) for pair, near in found.items()}


def compare(path, ours, twin):
    """Two ways of writing one cell: the same group and the same distances, as spglib has them. Whether both were seen."""
    if ours is None or twin is None or ours[1] is None or twin[1] is None:
        return False
    if ours[0] != twin[0]:
        fail(path, f"spglib finds space group {ours[0]}, and {twin[0]} in the other way of writing the cell")
    for pair in set(ours[1]) | set(twin[1]):
        for some, others in [(ours[1], twin[1]), (twin[1], ours[1])]:
            some, others = some.get(pair, []), others.get(pair, [])
            inside = [d for d in some if d < REACH - 0.01]
            if len(others) < len(inside) or any(abs(d - e) > 2e-3 for d, e in zip(inside, others)):
                fail(path, f"the distances of {pair} differ from those in the other way of writing the cell")
                return True
    return True


def with_pycifrw(path, small):
    import CifFile

    block = CifFile.ReadCif(path, grammar="auto").first_block()
    if abs(float(block["_cell_length_a"]) - small.cell.a) > 1e-6:
        fail(path, "PyCifRW reads another cell")
    if len(block["_atom_site_label"]) != len(small.sites):
        fail(path, "PyCifRW reads another number of atoms")


def said_by_us(binary, path):
    run = subprocess.run([binary, "vet", "--json", path], capture_output=True, text=True)
    # 1: a rule is broken, as in some real structures; the file was read all the same.
    if run.returncode not in (0, 1):
        fail(path, f"our own vet ends with {run.returncode}: {run.stdout}{run.stderr}")
        return None
    return json.loads(run.stdout.splitlines()[0])


def with_command(path, command, what):
    if shutil.which(command[0]) is None:
        return
    run = subprocess.run(command + [path], capture_output=True, text=True)
    if run.returncode != 0 or run.stdout.strip() or run.stderr.strip():
        fail(path, f"{what}: {run.stdout}{run.stderr}".strip())


def main():
    binary, paths = sys.argv[1], sys.argv[2:]
    if not paths:
        sys.exit("no CIF named")
    if shutil.which("cifparse") is None:
        missing("cifparse")
    dictionary = os.environ.get("INTERSTICE_CIF_DICTIONARY")
    if not dictionary:
        print("not checked against the core dictionary: INTERSTICE_CIF_DICTIONARY is not set")
    elif shutil.which("ddlm_validate") is None:
        missing("ddlm_validate")
    standard = {}
    for path in paths:
        said = said_by_us(binary, path)
        if said is None:
            continue
        small, atoms, number = with_gemmi(path, said)
        standard[path] = with_spglib(path, small, atoms, number)
        with_pycifrw(path, small)
        with_command(path, ["cifparse", "-c", "-q"], "cifparse")
        if dictionary:
            command = ["ddlm_validate", "--report-deprecated", "-d", f"{dictionary}/cif_core.dic", "-I", dictionary]
            with_command(path, command, "ddlm_validate")
    # The same cells in P 1 lie in a folder, or bear a name, with `-p1`.
    twins = [(path, path.replace("-p1", "")) for path in paths if "-p1" in path]
    pairs = sum(compare(path, standard.get(path), standard.get(twin)) for path, twin in twins)
    for failure in failures:
        print("FAILED", failure)
    print(f"{pairs} cells are the same in P 1 and in their space group")
    print(f"{len(paths)} files opened by gemmi, PyCifRW and spglib, {len(failures)} disagreements")
    sys.exit(1 if failures else 0)


main()
