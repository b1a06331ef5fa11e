"""Writes the files of this folder with pyarrow from those of arrowfile: make.py ARROWFILE_TESTDATA."""
import sys

import pyarrow as pa
import pyarrow.ipc as ipc
import pyarrow.parquet as pq

apples = ipc.open_file(sys.argv[1] + "/apples.arrow").read_all()
pq.write_table(apples, "apples.parquet", row_group_size=30, compression="zstd")
types = ipc.open_file(sys.argv[1] + "/types.arrow").read_all()
types = types.drop_columns(["interval", "float_levels"])  # pyarrow does not write them
pq.write_table(types, "types.parquet", row_group_size=7, compression={"label": "none", "text": "gzip", "span": "brotli"})
# Without rows, in Parquet's second form of data pages.
pq.write_table(apples.slice(0, 0), "no_rows.parquet", data_page_version="2.0")
# No schema in the footer; a dictionary that changes from row group to row group.
names = pa.table({"label": ["a", "b", "c", "a"] * 25, "x": list(range(100)), "w": [float(i % 7) for i in range(100)]})
pq.write_table(names, "plain.parquet", row_group_size=9, store_schema=False, data_page_version="2.0", compression="gzip")
grow = pa.table({"label": pa.array(["g%d" % (i // 10) for i in range(100)]).dictionary_encode(), "x": [i * 0.5 for i in range(100)]})
pq.write_table(grow, "grows.parquet", row_group_size=20)
