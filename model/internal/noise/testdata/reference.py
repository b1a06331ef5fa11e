"""Writes logistic.tsv and isotonic.tsv: inputs and, beside them, what scikit-learn makes of them.
Run in this folder: python3 reference.py"""
import numpy
from sklearn.isotonic import IsotonicRegression
from sklearn.linear_model import LogisticRegression

rng = numpy.random.default_rng(7)

# A score for class B against class A, and labels drawn with log-odds 1.7·score − 0.6.
score = rng.normal(size=600).round(5)
label = (rng.random(600) < 1 / (1 + numpy.exp(-(1.7 * score - 0.6)))).astype(int)
fit = LogisticRegression(C=numpy.inf, tol=1e-10, max_iter=1000).fit(score[:, None], label)
with open("logistic.tsv", "w") as out:
    print(f"slope and intercept\t{fit.coef_[0, 0]}\t{fit.intercept_[0]}", file=out)
    for s, y in zip(score, label):
        print(f"row\t{s}\t{y}", file=out)

at = rng.permutation(60) / 8 - 3
share = (numpy.clip(at / 6 + 0.5 + 0.3 * rng.normal(size=60), 0, 1)).round(4)
smooth = IsotonicRegression().fit(at, share).predict(at)
with open("isotonic.tsv", "w") as out:
    for row in zip(at, share, smooth):
        print("\t".join(str(v) for v in row), file=out)
