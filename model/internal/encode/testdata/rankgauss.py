"""Writes rankgauss.tsv: values with ties and, beside each, SciPy's normal quantile of its mid-rank, clipped at 1/1000.
Run in this folder: python3 rankgauss.py > rankgauss.tsv"""
import numpy
import scipy.stats

rng = numpy.random.default_rng(1)
print("column\tvalue\tquantile")
columns = {
    "normal": rng.normal(size=200).round(6),
    "ties": rng.integers(0, 9, size=200).astype(float),
    "skewed": numpy.exp(3 * rng.normal(size=200)).round(6),
    "nearly constant": numpy.where(rng.random(200) < 0.02, 1.0, 0.0),
}
for name, v in columns.items():
    rank = (scipy.stats.rankdata(v) - 0.5) / len(v)
    for x, q in zip(v, scipy.stats.norm.ppf(rank.clip(1e-3, 1 - 1e-3))):
        print(f"{name}\t{x!r}\t{q!r}".replace("np.float64(", "").replace(")", ""))
