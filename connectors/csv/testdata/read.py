"""Prints the cells of a file as Python's csv module reads them, and the columns' types as pandas infers them."""
import csv, json, sys
import pandas

rows = list(csv.reader(open(sys.argv[1], newline="", encoding="utf-8"), strict=True))
table = pandas.read_csv(sys.argv[1])
json.dump({
    "rows": rows,
    "types": {str(c): str(table[c].dtype) for c in table.columns},
    "numbers": [None if x != x else float(x).hex() for x in table["number"]],
    "moments": [str(x) for x in pandas.to_datetime(table["moment"])],
}, sys.stdout)
