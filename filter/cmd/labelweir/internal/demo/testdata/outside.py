"""Looks at the files of a demo with pyarrow and scikit-learn, and prints what they find as JSON.

usage: python3 outside.py DIR
"""

import json
import sys

import numpy as np
import pyarrow as pa
from pyarrow import feather
from sklearn.ensemble import RandomForestClassifier
from sklearn.metrics import average_precision_score
from sklearn.model_selection import cross_val_predict

folder = sys.argv[1]


def read(name):
    return feather.read_table(f"{folder}/{name}.arrow", memory_map=False)


line, planted, passed, held = read("line"), read("planted"), read("passed"), read("held")
out = pa.concat_tables([passed, held]).sort_by("apple_id")
tags = ["weir_score", "weir_verdict", "weir_implied", "weir_margin", "weir_reason", "weir_snapshot"]
wrong = np.array(planted["planted"].to_pylist())
score = np.array(out["weir_score"].to_pylist(), dtype=float)

# A forest judged out of fold, the usual way to rank labels by how much the rest of the data contradicts them.
grade = np.array(line["grade"].to_pylist())
numbers = ["diameter_mm", "mass_g", "red_share", "brix", "firmness_n", "blemish_share"]
columns = [np.array(line[n].to_pylist(), dtype=float) for n in numbers]
columns += [np.array([c == level for c in line["cultivar"].to_pylist()], dtype=float)
            for level in sorted(set(line["cultivar"].to_pylist()) - {None})]
features = np.column_stack(columns)
features = np.where(np.isnan(features), np.nanmedian(features, axis=0), features)
forest = RandomForestClassifier(300, min_samples_leaf=2, random_state=0)
chance = cross_val_predict(forest, features, grade, cv=5, method="predict_proba")
observed = np.searchsorted(np.unique(grade), grade)
forest_score = 1 - chance[np.arange(len(grade)), observed]

print(json.dumps({
    "rows": out.num_rows,
    "columns_kept": out.select(line.column_names).to_pydict() == line.to_pydict(),
    "types_kept": all(out.schema.field(n).type == line.schema.field(n).type for n in line.column_names),
    "tag_types": [str(out.schema.field(n).type) for n in tags],
    "average_precision": average_precision_score(wrong, score),
    "forest_average_precision": average_precision_score(wrong, forest_score),
}))
