#!/usr/bin/env python3
"""Writes golden.json beside this file: random cases with their figures by scikit-learn and numpy.

usage: python3 golden.py
"""
import json, os
import numpy as np, sklearn
from sklearn.metrics import average_precision_score, precision_score, recall_score, confusion_matrix

def ece(y, p):
    b = np.minimum((p * 10).astype(int), 9)
    return float(sum((b == k).mean() * abs(p[b == k].mean() - y[b == k].mean()) for k in range(10) if (b == k).any()))

r = np.random.default_rng(7)
cases = []
for name, n, digits, rate in [("smooth", 60, 6, .2), ("ties", 80, 1, .3), ("two scores", 40, 0, .4), ("rare", 120, 2, .03)]:
    y = r.random(n) < rate
    y[0] = True
    p = np.round(np.clip(r.beta(1, 3, n) + y * r.random(n) * .6, 0, 1), digits)
    caught = p >= .5
    cases.append(dict(name=name, wrong=y.tolist(), p=p.tolist(), average_precision=float(average_precision_score(y, p)),
                      ece=ece(y, p), precision=float(precision_score(y, caught)), recall=float(recall_score(y, caught))))
t, o = r.integers(0, 4, 90), r.integers(0, 4, 90)
flips = dict(truth=t.tolist(), observed=o.tolist(), rates=confusion_matrix(t, o, normalize="true").tolist())
out = os.path.join(os.path.dirname(os.path.abspath(__file__)), "golden.json")
with open(out, "w") as f:
    json.dump(dict(scikit_learn=sklearn.__version__, cases=cases, flips=flips), f)
    f.write("\n")
