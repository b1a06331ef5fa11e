"""Reads with pyarrow what was written and compares it with the input: compare.py INPUT TAGGED QUARANTINE TAGS ...

TAGS holds one JSON object a row with the tag that was delivered. Prints what differs; silent when all is right."""
import json
import math
import sys

import pyarrow as pa

NEW = [("weir_score", pa.float64(), True), ("weir_verdict", pa.dictionary(pa.int8(), pa.string()), False),
       ("weir_implied", pa.string(), True), ("weir_margin", pa.float64(), True),
       ("weir_reason", pa.dictionary(pa.int8(), pa.string()), True), ("weir_snapshot", pa.string(), True)]


def read(path):
    with open(path, "rb") as f:
        if f.read(6) == b"ARROW1":
            r = pa.ipc.open_file(path)
            return r.schema, [r.get_batch(i) for i in range(r.num_record_batches)], dict(r.metadata or {}), "file"
    r = pa.ipc.open_stream(path)
    return r.schema, list(r), {}, "stream"


def rows(batches, columns):
    """Values row by row; a dictionary value keeps its index so that replaced dictionaries show."""
    out = []
    for b in batches:
        lists = []
        for i in range(columns):
            c = b.column(i)
            lists.append(c.to_pylist())
            if isinstance(c, pa.DictionaryArray):
                lists.append(c.indices.to_pylist())
                lists.append([c.dictionary.to_pylist()] * len(c))
        out += [repr(r) for r in zip(*lists)]
    return out


def main(source, tagged, quarantine, tags):
    say = lambda *a: print(source, *a)
    tags = json.load(open(tags))
    schema, batches, meta, kind = read(source)
    n = len(schema)
    want = rows(batches, n)
    where = [(tagged, [i for i, t in enumerate(tags) if not t["Divert"]]), (quarantine, [i for i, t in enumerate(tags) if t["Divert"]])]
    for path, keep in where:
        s, bs, m, k = read(path)
        for b in bs:
            b.validate(full=True)
        if k != kind:
            say(path, "is a", k, "not a", kind)
        if m != meta:
            say(path, "footer metadata", m, "not", meta)
        if not pa.schema(list(s)[:n], s.metadata).equals(schema, check_metadata=True):
            say(path, "schema differs:", s, schema)
        for f, (name, t, null) in zip(list(s)[n:], NEW, strict=True):
            if (f.name, f.type, f.nullable) != (name, t, null):
                say(path, "column", f, "is not", name, t, null)
        got = rows(bs, n)
        if got != [want[i] for i in keep]:
            say(path, "rows differ:", next(((g, want[i]) for g, i in zip(got, keep) if g != want[i]), (len(got), len(keep))))
        new = [r for b in bs for r in b.select([name for name, _, _ in NEW]).to_pylist()]
        for r, i in zip(new, keep):
            t = tags[i]
            unscored = t["Verdict"] == "unscored"
            expect = {"weir_score": None if unscored else t["Score"], "weir_verdict": t["Verdict"],
                      "weir_implied": None if unscored else t["Implied"], "weir_margin": None if unscored else t["Margin"],
                      "weir_reason": t["Reason"] or None, "weir_snapshot": t["Snapshot"] or None}
            if r != expect:
                say(path, "row", i, r, "is not", expect)
                break


for i in range(1, len(sys.argv), 4):
    main(*sys.argv[i:i + 4])
