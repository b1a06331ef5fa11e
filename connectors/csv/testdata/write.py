"""Writes tables of invented apples with Python's csv module, one file for each way of quoting; prints their cells as JSON."""
import csv, json, random, sys

random.seed(7)
words = ["Gala", "Fuji", "", 'red "and" green', "a,b", "two\nlines", "cr\r\nlf", "Äpfel", " blanks ", "0071", "-1.5e3", "it's; x"]
out = {}
for name, options in {
    "minimal": {}, "all": {"quoting": csv.QUOTE_ALL}, "nonnumeric": {"quoting": csv.QUOTE_NONNUMERIC},
    "lf": {"lineterminator": "\n"}, "semicolon": {"delimiter": ";"}, "tab": {"delimiter": "\t"}, "bar": {"delimiter": "|"},
}.items():
    rows = [["id", "grade", "note, long", "size"]]
    rows += [[i, random.choice(words), random.choice(words), round(random.gauss(70, 5), 3)] for i in range(500)]
    path = f"{sys.argv[1]}/{name}.csv"
    with open(path, "w", newline="", encoding="utf-8") as f:
        csv.writer(f, **options).writerows(rows)
    out[path] = [[str(c) for c in row] for row in rows[1:]]
json.dump(out, sys.stdout)
