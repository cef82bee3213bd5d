"""Times Qhull (scipy.spatial) on the random packing that `cargo bench --bench packing` wrote down, side by side with it.

usage: qhull.py target/tmp/random-10000.json

Qhull knows no periodicity: it gets the points of the cube and their images, either all 26 neighbouring cells or only a
margin in which every sphere that can cut a cell must lie. Vertices and volumes of cells are left out: Qhull alone is timed.
"""

import itertools
import json
import sys
import time

import numpy
from scipy.spatial import Voronoi

data = json.load(open(sys.argv[1]))
edge, points = data["edge"], numpy.array(data["points"])
shifts = sorted(itertools.product((-1, 0, 1), repeat=3), key=lambda t: t != (0, 0, 0))
images = numpy.concatenate([points + shift for shift in shifts]) * edge
# Unit spheres: twice the farthest vertex of a cell of this packing, with room to spare.
margin = 6.0
near = ((images > -margin) & (images < edge + margin)).all(axis=1)
for name, cloud in [("27 cells", images), (f"cell and margin of {margin} radii", images[near])]:
    times = []
    for _ in range(1 if name == "27 cells" else 5):
        start = time.perf_counter()
        Voronoi(cloud)
        times.append(time.perf_counter() - start)
    print(f"{name}: {len(cloud)} points, best of {len(times)}: {min(times):.3f} s")
