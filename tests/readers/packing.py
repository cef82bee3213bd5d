"""Holds diagrams of packings against Qhull (scipy.spatial) and files of interstices against gemmi.

usage: packing.py DIAGRAMS HOLES

DIAGRAMS holds the cells that tests/packing/outside.rs wrote: the vertices and volume of the cell of each sphere and the
vertices of the whole diagram must be Qhull's, to 1e-8 of a sphere's radius and of a volume; spheres of different radii by
lifting them to a convex hull in four dimensions. HOLES holds CIFs with interstices as dummy sites. Exits 1 on any
disagreement.
"""

import glob
import itertools
import json
import sys

import gemmi
import numpy
from scipy.spatial import ConvexHull, Voronoi, cKDTree

SAME = 1e-8
failures = []


def fail(path, text):
    failures.append(f"{path}: {text}")


def cloud(vectors, points, reach):
    """All images of the points within `reach` of a point of the cell, those of the cell itself first."""
    spacing = 1 / numpy.linalg.norm(numpy.linalg.inv(vectors.T), axis=1)
    most = [range(-int(numpy.ceil(reach / d)) - 1, int(numpy.ceil(reach / d)) + 2) for d in spacing]
    shifts = numpy.array(sorted(itertools.product(*most), key=lambda t: t != (0, 0, 0)))
    home = points @ vectors
    images = numpy.concatenate([home + shift @ vectors for shift in shifts])
    of = numpy.tile(numpy.arange(len(points)), len(shifts))
    near = cKDTree(home).query(images)[0] <= reach
    return images[near], of[near]


def voronoi(images, n):
    """Vertices of the cells of the first n points."""
    diagram = Voronoi(images)
    for i in range(n):
        region = diagram.regions[diagram.point_region[i]]
        assert -1 not in region, "the cloud is too small"
        yield diagram.vertices[region]


def power(images, radii, n):
    """The same for spheres: the lower hull of (x, x² - r²), each facet a vertex."""
    middle = images[:n].mean(axis=0)
    x = images - middle
    hull = ConvexHull(numpy.column_stack([x, (x**2).sum(axis=1) - radii**2]))
    lower = hull.equations[:, 3] < -1e-9
    vertices = -hull.equations[lower, :3] / (2 * hull.equations[lower, 3:4]) + middle
    corners = hull.simplices[lower]
    for i in range(n):
        yield vertices[(corners == i).any(axis=1)]


def distinct(points):
    """Points of which none are nearer than SAME."""
    if len(points) == 0:
        return points
    pairs = cKDTree(points).query_pairs(10 * SAME)
    drop = {max(pair) for pair in pairs}
    return points[[i for i in range(len(points)) if i not in drop]]


def compare_diagram(path):
    data = json.load(open(path))
    vectors, points = numpy.array(data["vectors"]), numpy.array(data["points"])
    n, radii = len(points), numpy.array(data["radii"])
    name = f"{path} ({data['name']})"
    ours = [numpy.array(c["vertices"]).reshape(-1, 3) for c in data["cells"]]
    arms = [numpy.linalg.norm(v - p @ vectors, axis=1).max(initial=0) for v, p in zip(ours, points)]
    # Any sphere that can cut a cell lies within twice its farthest vertex; our own figure is not trusted: half as much more.
    images, of = cloud(vectors, points, 3 * max(arms) + 2 * radii.max())
    equal = (radii == radii[0]).all()
    theirs = voronoi(images, n) if equal else power(images, radii[of], n)
    worst_vertex = worst_volume = 0
    everywhere = []
    for i, (mine, found) in enumerate(zip(ours, theirs)):
        found = distinct(found)
        everywhere.append(found)
        if len(mine) != len(found):
            fail(name, f"cell {i}: {len(mine)} vertices, Qhull finds {len(found)}")
            continue
        if len(found) == 0:
            continue
        apart = max(cKDTree(mine).query(found)[0].max(), cKDTree(found).query(mine)[0].max())
        volume = ConvexHull(found).volume
        worst_vertex = max(worst_vertex, apart)
        worst_volume = max(worst_volume, abs(data["cells"][i]["volume"] / volume - 1))
    if worst_vertex > SAME or worst_volume > SAME:
        fail(name, f"vertices differ by {worst_vertex:.1e}, volumes by a share of {worst_volume:.1e}")
    if equal:
        # Each vertex of the whole diagram once, images counted as one.
        inside = numpy.concatenate(everywhere) @ numpy.linalg.inv(vectors)
        kept = []
        for p in inside:
            d = numpy.array([q - p for q in kept]).reshape(-1, 3)
            d = (d - numpy.round(d)) @ vectors
            if len(kept) == 0 or numpy.linalg.norm(d, axis=1).min() > 10 * SAME:
                kept.append(p)
        if len(kept) != len(data["vertices"]):
            fail(name, f"{len(data['vertices'])} vertices in the cell, Qhull finds {len(kept)}")
    return n, worst_vertex, worst_volume


def check_dummies(path):
    """gemmi sees the spheres as atoms, and every site flagged as a dummy as no element."""
    block = gemmi.cif.read_file(path).sole_block()
    small = gemmi.make_small_structure_from_block(block)
    flags = list(block.find_loop("_atom_site_calc_flag"))
    if len(small.sites) != len(flags) or "dum" not in flags:
        fail(path, f"gemmi reads {len(small.sites)} sites, the file lists {len(flags)}")
    for site, flag in zip(small.sites, flags):
        if (site.element.name == "X") != (flag == "dum"):
            fail(path, f"gemmi takes `{site.label}`, flagged {flag}, for {site.element.name}")
    return flags.count("dum")


def main():
    diagrams, holes = sys.argv[1:]
    paths = sorted(glob.glob(f"{diagrams}/*.json"))
    if len(paths) < 30:
        fail(diagrams, f"{len(paths)} diagrams; 30 at least are wanted")
    found = [compare_diagram(path) for path in paths]
    if found:
        print(
            f"{len(found)} diagrams, {sum(f[0] for f in found)} cells: vertices within {max(f[1] for f in found):.1e}, "
            f"volumes within {max(f[2] for f in found):.1e} of Qhull's"
        )
    files = sorted(glob.glob(f"{holes}/*.cif"))
    if not files:
        fail(holes, "no CIF with interstices")
    print(f"{len(files)} files of interstices: {sum(map(check_dummies, files))} dummies as gemmi reads them")
    for failure in failures:
        print(failure)
    return bool(failures)


sys.exit(main())
