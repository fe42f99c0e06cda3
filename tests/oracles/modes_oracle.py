"""Holds modes that planish computed against a plain direct Fourier sum by numpy.

Usage: python modes_oracle.py FILE.npz

The file holds `sites` (N, 2), scaled in-plane coordinates of the reference sites; `heights` (F, N), in any length unit;
`integers` (K, 2), the integers m of each mode; and `modes` (F, K), complex, in the unit of the heights:

    h_m = (1/N) sum_j h_j exp(-2 pi i m . s_j).

Exit status 0 if every mode is within 1e-6 of the root-mean-square mode of the file, 1 if one is not, 2 for a file that
does not hold these arrays.
"""

import sys

import numpy as np

TOLERANCE = 1e-6


def load(path):
    """Reads the four arrays and checks that their shapes agree."""
    with np.load(path, allow_pickle=False) as file:
        missing = [name for name in ("sites", "heights", "integers", "modes") if name not in file]
        if missing:
            raise ValueError(f"{path}: no array named {', '.join(missing)}; found {', '.join(file.files)}")
        sites, heights, integers, modes = (file[name] for name in ("sites", "heights", "integers", "modes"))
    expected = {
        "sites": (sites.shape, (heights.shape[1], 2)),
        "integers": (integers.shape, (modes.shape[1], 2)),
        "modes": (modes.shape, (heights.shape[0], integers.shape[0])),
    }
    for name, (found, wanted) in expected.items():
        if found != wanted:
            raise ValueError(f"{path}: {name} has shape {found}, expected {wanted}")
    if modes.size == 0:
        raise ValueError(f"{path}: no modes to check")
    return sites, heights, integers, modes


def direct_sum(sites, heights, integers):
    """The sum as it is written, one matrix of phases: shape (F, K)."""
    phases = np.exp(-2j * np.pi * (sites @ integers.T.astype(float)))
    return heights @ phases / len(sites)


def main(arguments):
    if len(arguments) != 1:
        print(__doc__, file=sys.stderr)
        return 2
    try:
        sites, heights, integers, modes = load(arguments[0])
    except (OSError, ValueError) as error:
        print(f"modes_oracle: {error}", file=sys.stderr)
        return 2
    exact = direct_sum(sites, heights, integers)
    scale = np.sqrt(np.mean(np.abs(exact) ** 2))
    errors = np.abs(modes - exact) / scale
    # A NaN anywhere makes the maximum NaN, which is not below the tolerance.
    worst = errors.max()
    frame, mode = np.unravel_index(np.argmax(errors), errors.shape)
    print(
        f"{modes.shape[0]} frames, {modes.shape[1]} modes: largest error {worst:.2e} of the root-mean-square mode, "
        f"in frame {frame} at m = {tuple(int(m) for m in integers[mode])}; allowed {TOLERANCE:.0e}"
    )
    return 0 if worst < TOLERANCE else 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
