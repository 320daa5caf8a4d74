"""Writes the expressions of a dashboard as recording rules, so that promtool can check them.

    python3 .ci/dashboard.py deploy/monitoring/dashboard.json > rules.json    (JSON is YAML)
"""
import json
import sys

with open(sys.argv[1], encoding="utf-8") as file:
    dashboard = json.load(file)
rules, places = [], []
for panel in dashboard["panels"]:
    places.append((panel["gridPos"]["x"], panel["gridPos"]["y"], panel["gridPos"]["w"], panel["gridPos"]["h"]))
    for target in panel.get("targets", []):
        expression = target["expr"].replace("$__rate_interval", "5m").replace("$instance", ".*")
        if "$" in expression:
            sys.exit(f"{panel['title']}: an unknown variable in {expression}")
        rules.append({"record": f"panel:{panel['id']}:{target['refId']}", "expr": expression})
for i, (x, y, w, h) in enumerate(places):
    for a, b, c, d in places[:i]:
        if x < a + c and a < x + w and y < b + d and b < y + h:
            sys.exit("two panels of the dashboard overlap")
if len(rules) < 20:
    sys.exit("the dashboard asks for next to nothing")
json.dump({"groups": [{"name": "dashboard", "rules": rules}]}, sys.stdout)
