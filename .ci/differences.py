"""Compares two files of answers line by line, number by number: the greatest difference relative to the size of the numbers, and whether everything else is equal.

    python3 .ci/differences.py ONE OTHER [GREATEST]    (1e-13 unless told)
"""
import json
import sys

greatest = float(sys.argv[3]) if len(sys.argv) > 3 else 1e-13
worst, where, numbers, beyond, others = 0.0, "", 0, 0, 0


def compare(a, b, path):
    global worst, where, numbers, beyond, others
    if isinstance(a, dict) and isinstance(b, dict) and a.keys() == b.keys():
        for key in a:
            if key != "sha256":
                compare(a[key], b[key], f"{path}/{key}")
    elif isinstance(a, list) and isinstance(b, list) and len(a) == len(b):
        for i, (x, y) in enumerate(zip(a, b)):
            compare(x, y, f"{path}/{i}")
    elif isinstance(a, (int, float)) and isinstance(b, (int, float)) and not isinstance(a, bool):
        numbers += 1
        difference = abs(a - b) / max(abs(a), abs(b), 1)
        if difference > worst:
            worst, where = difference, path
        beyond += difference > greatest
    elif a != b:
        others += 1
        if others == 1:
            print(f"{path}: {a!r:.200} and {b!r:.200}")


with open(sys.argv[1], encoding="utf-8") as one, open(sys.argv[2], encoding="utf-8") as other:
    lines = list(zip(one, other, strict=True))
for i, (a, b) in enumerate(lines):
    compare(json.loads(a), json.loads(b), f"line {i + 1}")
print(f"{sys.argv[2].rsplit('/', 1)[-1]}: {numbers} numbers, greatest difference {worst:.1e} at {where}, {beyond} beyond {greatest:g}, {others} things differ otherwise")
sys.exit(1 if beyond or others or not numbers else 0)
