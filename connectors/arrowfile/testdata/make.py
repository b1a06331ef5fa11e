"""Writes the small Arrow files of this folder with pyarrow. Run it here: python3 make.py"""
import datetime as dt
import decimal

import numpy as np
import pyarrow as pa

ROWS = 100


def apples():
    """An invented packing line: 100 graded apples."""
    r = np.random.default_rng(7)
    grade = r.choice(["extra", "first", "juice"], ROWS).tolist()
    grade[13] = grade[57] = None
    mm = r.normal(72, 6, ROWS).round(2)
    mm[5] = np.nan
    blush = [None if i % 17 == 3 else float(v) for i, v in enumerate(r.random(ROWS).round(3))]
    start = dt.datetime(2026, 5, 4, 6, 30, tzinfo=dt.timezone.utc)
    metadata = {"unit": "millimetres", "empty": ""}
    schema = pa.schema(
        [
            pa.field("apple_id", pa.int64(), nullable=False),
            pa.field("diameter_mm", pa.float32(), metadata=metadata),
            pa.field("blush", pa.float64()),
            pa.field("cultivar", pa.dictionary(pa.int8(), pa.string(), ordered=True)),
            pa.field("spots", pa.uint16()),
            pa.field("bruised", pa.bool_()),
            pa.field("spectrum", pa.list_(pa.float32(), 3)),
            pa.field("grader", pa.dictionary(pa.int32(), pa.large_string())),
            pa.field("graded_at", pa.timestamp("ms", "Europe/Oslo")),
            pa.field("grade", pa.string()),
        ],
        metadata={"line": "packing line 2", "pandas": "not really"},
    )
    columns = [
        list(range(1000, 1000 + ROWS)),
        mm.tolist(),
        blush,
        [["Aroma", "Gravenstein", "Discovery", None][i] for i in r.choice(4, ROWS, p=[0.5, 0.3, 0.15, 0.05])],
        r.poisson(2, ROWS).tolist(),
        [None if i % 31 == 30 else bool(v) for i, v in enumerate(r.random(ROWS) < 0.2)],
        [None if i % 29 == 7 else v for i, v in enumerate(r.normal(0, 1, (ROWS, 3)).round(3).tolist())],
        r.choice(["Astrid", "Birk"], ROWS).tolist(),
        [None if i == 44 else start + dt.timedelta(milliseconds=700 * i) for i in range(ROWS)],
        grade,
    ]
    arrays = [pa.array(c, f.type) for c, f in zip(columns, schema)]
    return pa.Table.from_arrays(arrays, schema=schema)


def types():
    """Twelve rows of every type that this pyarrow can put into a file and that arrow/go v16 knows."""
    n = 12
    text = ["a", "", None, "bb", "ccc", "a", "dddddddddddddddddddd", "e", None, "ü", "g", "a"]
    some = lambda f: [None if i % 5 == 3 else f(i) for i in range(n)]
    pair = pa.struct([pa.field("x", pa.int32(), metadata={"of": "pair"}), pa.field("y", pa.string(), nullable=False)])
    columns = {
        "label": pa.array([1, 2, None, 1, 1, 2, 3, 3, 2, 1, 1, 2], pa.int16()),
        "none": pa.nulls(n),
        "decimal": pa.array(some(lambda i: decimal.Decimal(i) / 4), pa.decimal128(9, 2)),
        "wide": pa.array(some(lambda i: decimal.Decimal(i) / 8), pa.decimal256(50, 3)),
        "half": pa.array(np.arange(n), pa.float16()),
        "day": pa.array(some(lambda i: dt.date(2026, 1, 1 + i)), pa.date32()),
        "day64": pa.array(some(lambda i: dt.date(2026, 1, 1 + i)), pa.date64()),
        "clock": pa.array(some(lambda i: dt.time(i, 1)), pa.time32("s")),
        "clock64": pa.array(some(lambda i: dt.time(i, 1)), pa.time64("ns")),
        "span": pa.array(some(lambda i: dt.timedelta(seconds=i)), pa.duration("us")),
        "interval": pa.array(some(lambda i: pa.MonthDayNano([i, 2, 3])), pa.month_day_nano_interval()),
        "moment": pa.array(some(lambda i: dt.datetime(2026, 1, 1, i)), pa.timestamp("ns")),
        "text": pa.array(text),
        "large_text": pa.array(text, pa.large_string()),
        "view": pa.array(text, pa.string_view()),
        "bytes": pa.array([t and t.encode() for t in text], pa.binary()),
        "large_bytes": pa.array([t and t.encode() for t in text], pa.large_binary()),
        "three": pa.array(some(lambda i: b"%03d" % i), pa.binary(3)),
        "list": pa.array(some(lambda i: list(range(i))), pa.list_(pa.field("step", pa.int32(), nullable=False))),
        "large_list": pa.array(some(lambda i: ["x"] * (i % 3)), pa.large_list(pa.string())),
        "fixed_list": pa.array(some(lambda i: [i, None]), pa.list_(pa.int8(), 2)),
        "pair": pa.array(some(lambda i: {"x": i, "y": str(i)}), pair),
        "map": pa.array(some(lambda i: [("k%d" % i, i)]), pa.map_(pa.string(), pa.int64(), keys_sorted=True)),
        "levels": pa.array(text).dictionary_encode(),
        "int_levels": pa.DictionaryArray.from_arrays(
            pa.array([0, 1, 2, 0, None, 1, 2, 0, 1, 2, 0, 1], pa.uint8()), pa.array([30, 10, 20], pa.int64())),
        "float_levels": pa.DictionaryArray.from_arrays(
            pa.array([0, 1, 2, 0, None, 1, 2, 0, 1, 2, 0, 1], pa.int64()), pa.array([0.5, None, 2.5])),
        "nested_levels": pa.ListArray.from_arrays(
            list(range(0, n + 1)), pa.array(text).dictionary_encode()),
    }
    return pa.table(columns)


def unions():
    """Columns whose pieces can't be joined: unions and runs."""
    n = 12
    ids = pa.array([i % 2 for i in range(n)], pa.int8())
    sparse = pa.UnionArray.from_sparse(ids, [pa.array(range(n), pa.int64()), pa.array([str(i) for i in range(n)])])
    dense = pa.UnionArray.from_dense(ids, pa.array([i // 2 for i in range(n)], pa.int32()),
                                     [pa.array(range(6), pa.int64()), pa.array([str(i) for i in range(6)])])
    runs = pa.RunEndEncodedArray.from_arrays(pa.array([5, 6, 12], pa.int32()), pa.array(["a", "b", "c"]))
    return pa.table({"label": pa.array(["p", "q"] * 6), "x": pa.array(range(n), pa.float64()) , "runs": runs,
                     "sparse": sparse, "dense": dense})


def write(name, table, rows, maker=None, batch=None, **options):
    maker = maker or (pa.ipc.new_file if name.endswith(".arrow") else pa.ipc.new_stream)
    with maker(name, table.schema, options=pa.ipc.IpcWriteOptions(**options)) as w:
        for b in table.to_batches(max_chunksize=rows):
            w.write_batch(b)


def growing(deltas_only):
    """Batches whose dictionary grows, and unless deltas_only is then replaced by another."""
    words = [["red"], ["red", "green"], ["red", "green", "stripe"]] + ([] if deltas_only else [["stripe", "red"]])
    for k, w in enumerate(words):
        codes = pa.array([i % len(w) for i in range(5)] + [None], pa.int8())
        colour = pa.DictionaryArray.from_arrays(codes, pa.array(w))
        label = pa.DictionaryArray.from_arrays(codes, pa.array(["L" + x for x in w]))
        x = pa.array([float(10 * k + i) for i in range(6)])
        yield pa.record_batch([x, colour, label], names=["x", "colour", "label"])


def write_growing(name, deltas_only, deltas):
    batches = list(growing(deltas_only))
    maker = pa.ipc.new_file if name.endswith(".arrow") else pa.ipc.new_stream
    with maker(name, batches[0].schema, options=pa.ipc.IpcWriteOptions(emit_dictionary_deltas=deltas)) as w:
        for b in batches:
            w.write_batch(b)


def main():
    t = apples()
    with pa.ipc.new_file("apples.arrow", t.schema, metadata={"shift": "early", "bin": ""}) as w:
        for i, b in enumerate(t.to_batches(max_chunksize=40)):
            w.write_batch(b, custom_metadata={"crate": str(i)})
    write("apples.arrows", t, 7, compression="zstd")
    write("apples_v4.arrow", t, 50, metadata_version=pa.ipc.MetadataVersion.V4, use_legacy_format=True)
    write("apples_v4.arrows", t, 50, metadata_version=pa.ipc.MetadataVersion.V4, use_legacy_format=True)
    write("types.arrow", types(), 5, compression="lz4")
    write("types.arrows", types(), 12)
    write("unions.arrow", unions(), 12)
    write_growing("grows.arrow", True, True)
    write_growing("grows.arrows", True, True)
    write_growing("replaced.arrows", False, False)
    write("no_rows.arrow", t.slice(0, 0), 1)
    with pa.ipc.new_stream("no_batches.arrows", t.schema):
        pass
    with pa.ipc.new_file("no_batches.arrow", t.schema):
        pass
    names = ["mm", "grade", "mm", "grade", "mm#2"]
    write("twice.arrow", pa.Table.from_arrays([t["diameter_mm"], t["grade"], t["blush"], t["grade"], t["spots"]], names=names), 100)


main()
