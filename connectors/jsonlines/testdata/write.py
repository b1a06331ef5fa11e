"""Writes invented apples as JSON lines with Python's json module, in several manners; prints each line's values as JSON text."""
import json, random, sys

random.seed(11)
words = ["Gala", "Fuji", "", 'red "and" green', "tab\tline\n", "Äpfel", "\U0001f34e", "back\\slash", "\u2028"]
out = {}
for name, options in {
    "usual": {}, "tight": {"separators": (",", ":")}, "unicode": {"ensure_ascii": False}, "wide": {"separators": (" , ", " :  ")},
}.items():
    path = f"{sys.argv[1]}/{name}.jsonl"
    rows = []
    for i in range(500):
        row = {"id": i, "grade": random.choice(words), "size": random.gauss(70, 5), "big": random.getrandbits(62), "ripe": random.random() < 0.5,
               "red": [random.random() for _ in range(3)], "box": {"no": i, "words": words[:2]}, "note": random.choice([None, "x"])}
        items = list(row.items())
        if i > 0:
            random.shuffle(items)
            items = items[:random.randint(1, len(items))]
        rows.append(dict(items))
    with open(path, "w", newline=random.choice(["\n", "\r\n"]), encoding="utf-8") as f:
        for row in rows:
            f.write(json.dumps(row, **options) + "\n")
    out[path] = rows
json.dump(out, sys.stdout)
