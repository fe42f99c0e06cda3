"""Holds the modes of whole frames that planish projected against numpy, from the raw positions.

Usage: python frames_oracle.py FILE.npz

The file holds `positions` (F, N, 3) and `cells` (F, 3, 3; rows a, b, c) as the trajectory has them, in A; `sites`
(N, 3), the reference sites: scaled along a and b, and height in A; `integers` (K, 2); and `modes` (F, K), complex, in A.
From positions and cells alone, but for the reference sites, every frame is unwrapped, freed of its drift and of its mean
height, and summed as it is written:

    h_m = (1/N) sum_j h_j exp(-2 pi i m . s_j).

For sheets of one plane in a cell whose c stands upright on a and b. Exit status as modes_oracle.py.
"""

import sys

import numpy as np

from modes_oracle import TOLERANCE, direct_sum

ARRAYS = ("positions", "cells", "sites", "integers", "modes")


def heights_of_frame(positions, cell, sites):
    """Height of each atom above the sheet's mean, in A: shape (N,)."""
    scaled = np.linalg.solve(cell.T, positions.T).T
    thickness = cell[2, 2]
    reference = np.column_stack((sites[:, :2], sites[:, 2] / thickness))
    moved = scaled - reference
    # Each atom in the image that has moved as the first one, then the mean motion taken out, then nearest images again.
    moved -= np.round(moved - moved[0])
    moved -= moved.mean(axis=0)
    moved -= np.round(moved)
    heights = (reference[:, 2] + moved[:, 2]) * thickness
    return heights - heights.mean()


def main(arguments):
    if len(arguments) != 1:
        print(__doc__, file=sys.stderr)
        return 2
    try:
        with np.load(arguments[0], allow_pickle=False) as file:
            positions, cells, sites, integers, modes = (file[name] for name in ARRAYS)
    except (OSError, KeyError, ValueError) as error:
        print(f"frames_oracle: {error}", file=sys.stderr)
        return 2
    upright = np.all(cells[:, 2, :2] == 0.0) and np.all(cells[:, :2, 2] == 0.0)
    if modes.size == 0 or modes.shape != (len(positions), len(integers)) or not upright:
        print(f"frames_oracle: {arguments[0]}: no modes, wrong shapes, or a leaning cell", file=sys.stderr)
        return 2
    heights = np.array([heights_of_frame(r, cell, sites) for r, cell in zip(positions, cells)])
    exact = direct_sum(sites[:, :2], heights, integers)
    errors = np.abs(modes - exact) / np.sqrt(np.mean(np.abs(exact) ** 2))
    worst = errors.max()
    frame, mode = np.unravel_index(np.argmax(errors), errors.shape)
    print(
        f"{modes.shape[0]} frames, {modes.shape[1]} modes: largest error {worst:.2e} of the root-mean-square mode, "
        f"in frame {frame} at m = {tuple(int(m) for m in integers[mode])}; allowed {TOLERANCE:.0e}"
    )
    return 0 if worst < TOLERANCE else 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
