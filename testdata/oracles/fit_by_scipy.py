#!/usr/bin/env python3
"""Fits the quotes of configs/marram-coast-quotes.csv with scipy, independently of the program, and prints fit_by_scipy.json.

Needs numpy and scipy (Debian: python3-scipy). Run from the top of the project:
    python3 testdata/oracles/fit_by_scipy.py > testdata/oracles/fit_by_scipy.json
"""
import csv, json
import numpy as np
from scipy import optimize, stats, integrate

BROKERAGE = 0.1
rows = [r for r in csv.DictReader(open("configs/marram-coast-quotes.csv")) if r["curve"] == "property"]
a = np.array([float(r["attachment_probability"]) for r in rows])
e = np.array([float(r["exhaustion_probability"]) for r in rows])
m = np.array([float(r["expected_loss"]) for r in rows])
target = np.array([float(r["rate_on_line"]) for r in rows]) * (1 - BROKERAGE)
c = (a - e) / (m - e) - 1  # survival along S(u) = e + (a - e)(1 - u)^c


def layer(g, j):
    """Integral of g over the layer's survival function, by adaptive quadrature."""
    return integrate.quad(lambda x: g(e[j] + (a[j] - e[j]) * x ** c[j]), 0, 1, limit=500, epsabs=1e-13, epsrel=1e-11)[0]


def family(g, low, high):
    """Least squares of relative errors over one parameter."""
    objective = lambda p: sum((layer(lambda s: g(s, p), j) / target[j] - 1) ** 2 for j in range(len(a)))
    best = optimize.minimize_scalar(objective, bounds=(low, high), method="bounded", options={"xatol": 1e-10})
    return {"parameter": best.x, "objective": best.fun}


# The free curve on the program's knots: 120 geometric ones from 1e-4 to 1, and where quotes attach and exhaust; the first column is the supremum.
tails = np.unique(np.concatenate([[1.0], 1e-4 ** (np.arange(120) / 119), a, e]))


def tail(t, j):
    """Integral of min(S/t, 1), by splitting where S crosses t."""
    if t <= e[j]:
        return 1.0
    x = 1.0 if t >= a[j] else ((t - e[j]) / (a[j] - e[j])) ** (1 / c[j])
    return (1 - x) + (e[j] * x + (a[j] - e[j]) * x ** (c[j] + 1) / (c[j] + 1)) / t


M = np.array([[1.0] + [tail(t, j) for t in tails] for j in range(len(a))]) / target[:, None]
n = M.shape[1]

# Least squares on the simplex: non-negative least squares with a row of ones of growing weight, then polished by SLSQP on the active columns.
weight = 1e4
w, _ = optimize.nnls(np.vstack([M, weight * np.ones(n)]), np.concatenate([np.ones(len(a)), [weight]]), maxiter=100 * n)
active = np.flatnonzero(w > 1e-9)
A = M[:, active]
r = optimize.minimize(lambda v: np.sum((A @ v - 1) ** 2), w[active] / w[active].sum(), jac=lambda v: 2 * A.T @ (A @ v - 1), method="SLSQP",
                      bounds=[(0, None)] * len(active), constraints={"type": "eq", "fun": lambda v: v.sum() - 1, "jac": lambda v: np.ones(len(v))},
                      options={"ftol": 1e-16, "maxiter": 2000})
squares = r.fun

# Least absolute errors: a linear programme by HiGHS.
k = len(a)
lad = optimize.linprog(np.concatenate([np.zeros(n), np.ones(2 * k)]),
                       A_eq=np.vstack([np.hstack([M, np.eye(k), -np.eye(k)]), np.concatenate([np.ones(n), np.zeros(2 * k)])[None, :]]),
                       b_eq=np.ones(k + 1), bounds=(0, None), method="highs")
# Least worst.
worst = optimize.linprog(np.concatenate([np.zeros(n), [1]]),
                         A_ub=np.vstack([np.hstack([M, -np.ones((k, 1))]), np.hstack([-M, -np.ones((k, 1))])]), b_ub=np.concatenate([np.ones(k), -np.ones(k)]),
                         A_eq=np.concatenate([np.ones(n), [0]])[None, :], b_eq=[1], bounds=(0, None), method="highs")

print(json.dumps({
    "description": "made by fit_by_scipy.py from configs/marram-coast-quotes.csv, curve property, brokerage 10 %",
    "scipy": __import__("scipy").__version__,
    "wang": family(lambda s, p: stats.norm.cdf(stats.norm.ppf(s) + p), 0, 2),
    "proportional_hazard": family(lambda s, p: s ** (1 / p), 1, 5),
    "dual_power": family(lambda s, p: 1 - (1 - s) ** p, 1, 20),
    "free_squares": squares,
    "free_absolute": lad.fun,
    "free_worst": worst.fun,
}, indent=1))
