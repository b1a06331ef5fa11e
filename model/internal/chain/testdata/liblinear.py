"""Time LIBLINEAR's L2-regularised logistic regression on the matrix that the benchmarks of this package use.

    LABELWEIR_MATRIX=/tmp/matrix go test ./model/internal/chain -run WriteEncodedMatrix
    python3 model/internal/chain/testdata/liblinear.py /tmp/matrix
    go test ./model/internal/chain -run XX -bench 'Graduated|Warm'

Needs numpy, scipy and scikit-learn. C = 1/(2λN) is the weight of the data that λ stands for.
"""
import json
import sys
import time

import numpy as np
import scipy.sparse as sp
from sklearn.linear_model import LogisticRegression

path = sys.argv[1]
meta = json.load(open(path + ".json"))
n, d, trees, leaf_cols = meta["n"], meta["dense"], meta["trees"], meta["leaf_cols"]
x = np.fromfile(path + ".x", "<f4").reshape(n, d).astype(float)
leaves = np.fromfile(path + ".leaves", "<i4").reshape(n, trees)
y = np.fromfile(path + ".y", "i1")
indptr = np.arange(0, n * trees + 1, trees)
block = sp.csr_matrix((np.full(n * trees, meta["leaf_value"]), leaves.ravel(), indptr), shape=(n, leaf_cols))
matrix = sp.hstack([sp.csr_matrix(x), block]).tocsr()
for name, c in (("C = 1/(2*lambda*N)", 1 / (2 * meta["lambda"] * n)), ("C = 1 (its default)", 1.0)):
    times = []
    for _ in range(5):
        fit = LogisticRegression(solver="liblinear", C=c, fit_intercept=False, class_weight="balanced")
        start = time.process_time()
        fit.fit(matrix, y)
        times.append(time.process_time() - start)
    print(f"{name}: median {np.median(times)*1e3:.0f} ms cpu, least {min(times)*1e3:.0f} ms cpu, {fit.n_iter_[0]} iterations")
