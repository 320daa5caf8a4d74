"""Asks a service that has a fifth of a processor for more than it can: each answer must be right or a refusal with Retry-After, and the probe must be answered.

    python3 .ci/quota.py http://127.0.0.1:PORT
"""
import concurrent.futures
import json
import sys
import time
import urllib.error
import urllib.request

base = sys.argv[1]
# By hand: area 1 m2, hydraulic radius 2^(-3/2) m, so that Q = 1/0.0125 * 1/2 * 0.02 = 0.8 m3/s at a depth of 1 m.
body = b'{"section":{"kind":"triangular","side_slope":1},"roughness":{"manning":0.0125},"bed_slope":0.0004,"discharge":0.8}'


def ask(_):
    request = urllib.request.Request(base + "/v1/depths?detail=brief", body, {"Content-Type": "application/json"})
    try:
        with urllib.request.urlopen(request, timeout=30) as response:
            return abs(json.load(response)["normal_depth"] - 1) < 1e-9 and "right"
    except urllib.error.HTTPError as error:
        return error.code == 503 and error.headers["Retry-After"] is not None and "refused"


began, outcomes = time.monotonic(), {}
with concurrent.futures.ThreadPoolExecutor(32) as pool:
    for outcome in pool.map(ask, range(2000)):
        outcomes[outcome] = outcomes.get(outcome, 0) + 1
    slowest = 0
    for _ in range(20):
        before = time.monotonic()
        urllib.request.urlopen(base + "/livez", timeout=5).close()
        slowest = max(slowest, time.monotonic() - before)
print(f"2000 requests in {time.monotonic() - began:.1f} s: {outcomes}; slowest probe afterwards {slowest * 1000:.0f} ms")
if set(outcomes) - {"right", "refused"} or "right" not in outcomes:
    sys.exit("something else than right answers and refusals")
