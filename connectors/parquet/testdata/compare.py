"""Compares with pyarrow and pandas what was written with its input: compare.py INPUT OUTPUT ...

Prints what differs in the input's columns: values, types, metadata, compression. Silent when all is right."""
import sys

import pandas
import pyarrow as pa
import pyarrow.ipc as ipc
import pyarrow.parquet as pq


def read(path):
    if path.endswith(".parquet"):
        f = pq.ParquetFile(path)
        t = pq.read_table(path)
        codecs = {}
        if f.metadata.num_row_groups:
            g = f.metadata.row_group(0)
            codecs = {g.column(i).path_in_schema: g.column(i).compression for i in range(g.num_columns)}
        return t, codecs
    return (ipc.open_stream if path.endswith("s") else ipc.open_file)(path).read_all(), None


def stored(t):
    """The type that Parquet has for a type, as pyarrow reads it back."""
    if pa.types.is_dictionary(t):
        value = pa.string() if t.value_type == pa.large_string() else stored(t.value_type)
        return value if pa.types.is_integer(value) else pa.dictionary(pa.int32(), value, t.ordered)
    if t in (pa.string_view(), pa.binary_view()):
        return pa.string() if t == pa.string_view() else pa.binary()
    if pa.types.is_large_list(t) or pa.types.is_list(t):
        return pa.list_(pa.field("element", stored(t.value_type)))
    if pa.types.is_fixed_size_list(t):
        return pa.list_(pa.field("element", stored(t.value_type)), t.list_size)
    if pa.types.is_map(t):
        return pa.map_(t.key_type, t.item_type)
    if t == pa.date64():
        return pa.date32()
    if t == pa.time32("s"):
        return pa.time32("ms")
    if t == pa.timestamp("s"):
        return pa.timestamp("ms")
    return t


def main(a, b):
    (want, codecs), (got, codecs_now) = read(a), read(b)
    got.validate(full=True)
    for f in want.schema:
        g = got.schema.field(f.name)
        if stored(f.type) != stored(g.type):
            print(b, "type of", f.name, "is", g.type, "not", stored(f.type))
        if (f.metadata or {}) != (g.metadata or {}) or f.nullable != g.nullable:
            print(b, "field", f.name, g.metadata, g.nullable, "not", f.metadata, f.nullable)
        x, y = want.column(f.name).to_pylist(), got.column(f.name).to_pylist()
        if repr(x) != repr(y):
            print(b, f.name, next((i, p, q) for i, (p, q) in enumerate(zip(x, y)) if repr(p) != repr(q)))
    if want.schema.metadata != got.schema.metadata:
        print(b, "metadata", got.schema.metadata, "not", want.schema.metadata)
    for path, codec in (codecs or {}).items():
        if codecs_now and codecs_now.get(path.replace(".item", ".element")) not in (codec, None):
            print(b, path, "is compressed as", codecs_now[path], "not", codec)
    if b.endswith(".parquet") and (want.schema.metadata or {}).get(b"pandas") != b"not really":
        if len(pandas.read_parquet(b)) != len(want):
            print(b, "has other rows for pandas")


for i in range(1, len(sys.argv), 2):
    main(*sys.argv[i:i + 2])
