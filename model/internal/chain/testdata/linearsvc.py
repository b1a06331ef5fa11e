"""Write linearsvc.json: optima of the squared hinge as LIBLINEAR finds them.

    python3 model/internal/chain/testdata/linearsvc.py > model/internal/chain/testdata/linearsvc.json

scikit-learn's LinearSVC minimises ½‖w‖² + C Σ sᵢ max(0, 1−mᵢ)²; divided by 2λ, the objective of this package at
q = −Inf is that with C = 1/(2λ) and sᵢ = ωᵢ. Features are rounded to 1/64, so they are exact in every format.
"""
import json

import numpy as np
import sklearn
from sklearn.svm import LinearSVC

rng = np.random.default_rng(7)
cases = []
for n, d, lam in ((40, 3, 1e-1), (120, 6, 1e-2), (200, 10, 1e-3), (60, 20, 3e-3)):
    x = np.round(rng.normal(size=(n, d)) * 64) / 64
    x[:, -1] = 1
    y = np.where(x @ rng.normal(size=d) + rng.normal(size=n) > 0, 1, -1)
    omega = rng.integers(1, 9, size=n).astype(float)
    omega /= omega.sum()
    fit = LinearSVC(loss="squared_hinge", dual=False, C=1 / (2 * lam), fit_intercept=False, tol=1e-12, max_iter=100000)
    fit.fit(x, y, sample_weight=omega)
    w = fit.coef_[0]
    j = float(omega @ np.maximum(0, 1 - y * (x @ w)) ** 2 + lam * w @ w)
    cases.append({"lambda": lam, "x": x.tolist(), "y": y.tolist(), "omega": omega.tolist(), "w": w.tolist(), "j": j})
print(json.dumps({"made_with": "scikit-learn " + sklearn.__version__, "cases": cases}))
