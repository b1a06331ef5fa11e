"""Prints what Python's json module and pandas read of a file of JSON lines, numbers exactly."""
import json, sys
import pandas

rows = [json.loads(line) for line in open(sys.argv[1], encoding="utf-8")]
table = pandas.read_json(sys.argv[1], lines=True, precise_float=True)
json.dump({
    "rows": [[None if r["number"] is None else float(r["number"]).hex(), r["word"], str(r["whole"]), r["moment"], r["price"], r["list"]] for r in rows],
    "types": {str(c): str(table[c].dtype) for c in table.columns},
    "words": list(table["word"]),
}, sys.stdout)
