"""Autocorrelation times of seeded series by a general-purpose library, for tests/statistics_library.rs.

    python tests/oracles/statistics_oracle.py > tests/oracles/statistics_oracle.json

Needs numpy and emcee (a general Markov-chain Monte Carlo library). emcee's "integrated time" is 1 + 2 sum rho_k, the
statistical inefficiency g = 2 tau, and its window is c g: a window of 8 tau is c = 4 there. Series are written as integers, in thousandths.
"""

import json
import sys

import emcee
import numpy as np

LENGTH = 8000
BURN_IN = 500


def autoregression(coefficients, seed):
    """x_t = sum_i coefficients[i] x_(t-1-i) + standard normal noise."""
    noise = np.random.default_rng(seed).standard_normal(LENGTH + BURN_IN)
    order = len(coefficients)
    x = np.zeros(LENGTH + BURN_IN)
    for t in range(order, LENGTH + BURN_IN):
        x[t] = noise[t] + sum(c * x[t - 1 - i] for i, c in enumerate(coefficients))
    return np.rint(1000 * x[BURN_IN:]).astype(int)


CASES = [([0.5], 1), ([0.8], 2), ([0.9], 3), ([1.2, -0.4], 4)]

result = {
    "made_by": "tests/oracles/statistics_oracle.py",
    "library": f"emcee {emcee.__version__}, numpy {np.__version__}",
    "cases": [],
}
for coefficients, seed in CASES:
    series = autoregression(coefficients, seed)
    g = float(emcee.autocorr.integrated_time(series.astype(float), c=4, quiet=True)[0])
    result["cases"].append(
        {
            "coefficients": coefficients,
            "seed": seed,
            "inefficiency": round(g, 6),
            "effective_samples": round(LENGTH / g, 4),
            "thousandths": series.tolist(),
        }
    )
json.dump(result, sys.stdout, separators=(",", ":"))
print()
