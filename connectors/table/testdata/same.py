"""Reads tables and tells where they differ: same.py INPUT OUTPUT ... Silent when all is right.

INPUT is an Arrow stream; OUTPUT is an Arrow stream, Parquet, CSV or JSON lines with more columns behind."""
import csv
import decimal
import json
import struct
import sys

import pyarrow as pa
import pyarrow.ipc as ipc
import pyarrow.parquet as pq


def differs(a, b):
    return repr(a) != repr(b)


def arrow(path, want, got, exact):
    got.validate(full=True)
    for f in want.schema:
        g = got.schema.field(f.name)
        if exact and not f.equals(g, check_metadata=True):
            print(path, "field", g, g.metadata, "is not", f, f.metadata)
        if (f.metadata or {}) != (g.metadata or {}):
            print(path, "metadata of", f.name, g.metadata, "not", f.metadata)
        if pa.types.is_timestamp(f.type) and f.type != g.type:
            print(path, f.name, g.type, "not", f.type)
        x, y = want.column(f.name).to_pylist(), got.column(f.name).to_pylist()
        if differs(x, y):
            print(path, f.name, f.type, next((i, p, q) for i, (p, q) in enumerate(zip(x, y)) if differs(p, q)) if len(x) == len(y) else (len(x), len(y)))
    if want.schema.metadata != got.schema.metadata:
        print(path, "metadata", got.schema.metadata, "not", want.schema.metadata)


def texts(path, want, rows, number):
    """Numbers, booleans, text and exact decimals as the format writes them; the other types by tests of their own."""
    if len(rows) != len(want):
        print(path, len(rows), "rows, not", len(want))
        return
    for f in want.schema:
        t = f.type
        for i, (v, got) in enumerate(zip(want.column(f.name).to_pylist(), (r[f.name] for r in rows))):
            if v is None:
                ok = got is None or got == ""
            elif pa.types.is_boolean(t) or pa.types.is_integer(t) or pa.types.is_floating(t) or pa.types.is_decimal(t):
                ok = narrow(t, float(got)) == v if pa.types.is_floating(t) else number(got, v)
            elif pa.types.is_string(t) or pa.types.is_large_string(t) or pa.types.is_dictionary(t):
                ok = got == v
            else:
                continue
            if not ok:
                print(path, f.name, t, "row", i, repr(got), "is not", repr(v))
                break


def narrow(t, v):
    """The value of type t that the shortest text of it means."""
    kind = {pa.float16(): "e", pa.float32(): "f", pa.float64(): "d"}[t]
    return struct.unpack(kind, struct.pack(kind, v))[0]


def csv_number(got, v):
    if isinstance(v, bool):
        return got == ("true" if v else "false")
    return type(v)(got) == v


def json_number(got, v):
    if isinstance(v, decimal.Decimal):
        return decimal.Decimal(str(got)) == v if isinstance(got, str) else float(v) == float(got)
    return got == v and isinstance(got, bool) == isinstance(v, bool)


for a, b in zip(sys.argv[1::2], sys.argv[2::2]):
    want = ipc.open_stream(a).read_all()
    if b.endswith(".arrows"):
        arrow(b, want, ipc.open_stream(b).read_all(), True)
    elif b.endswith(".parquet"):
        arrow(b, want, pq.read_table(b), False)
    elif b.endswith(".csv"):
        with open(b, newline="", encoding="utf-8") as f:
            texts(b, want, list(csv.DictReader(f)), csv_number)
    else:
        with open(b, encoding="utf-8") as f:
            texts(b, want, [json.loads(line) for line in f], json_number)
