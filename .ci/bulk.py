#!/usr/bin/env python3
"""Send many lines of the demo register to a running service's bulk `depths` and check every answer.

Checked are: one answer a line, in order, with the line's id; a result for each good line, the same bytes whenever the same asset
comes again; a problem for each bad line and no other; the counts and the hash of the end line; and the resident memory of the
service, which must not grow with the number of lines.
"""
import argparse
import hashlib
import http.client
import json
import os
import sys
import threading
import time
import urllib.parse
import urllib.request

TYPE = "application/x-ndjson"
# Each costs one line and no more: broken syntax, an unknown member, a wrong type, a rule, text that is no object, and bad UTF-8.
BAD = [
    b'{"id":%d,"section":{"kind":"circular"',
    b'{"id":%d,"section":{"kind":"circular","diamter":0.6},"roughness":{"manning":0.013},"bed_slope":0.01,"discharge":0.1}',
    b'{"id":%d,"section":{"kind":"circular","diameter":"0.6"},"roughness":{"manning":0.013},"bed_slope":0.01,"discharge":0.1}',
    b'{"id":%d,"section":{"kind":"circular","diameter":0.6},"roughness":{"manning":0.013},"bed_slope":0.01,"discharge":-0.1}',
    b"[%d]",
    b'{"id":%d,"section":"\xff"}',
]
BLOCK = 500  # lines written at once


def fail(message):
    sys.exit("FAILED: " + message)


class Memory(threading.Thread):
    """Samples the resident memory of a process."""

    def __init__(self, pid):
        super().__init__(daemon=True)
        self.pid, self.samples, self.over = pid, [], threading.Event()

    def run(self):
        while not self.over.wait(0.1):
            try:
                with open(f"/proc/{self.pid}/status") as status:
                    kib = next(int(line.split()[1]) for line in status if line.startswith("VmRSS:"))
            except (OSError, StopIteration):
                return
            self.samples.append(kib / 1024)

    def report(self, flat):
        self.over.set()
        self.join()
        if len(self.samples) < 8:
            print(f"resident memory: only {len(self.samples)} samples, {self.samples}")
            return
        quarter = len(self.samples) // 4
        peaks = [max(self.samples[i * quarter : (i + 1) * quarter]) for i in range(4)]
        print("resident memory, MiB: at the start %.1f, peak of each quarter %s" % (self.samples[0], ", ".join("%.1f" % p for p in peaks)))
        # The first quarter is for the heap to find its size.
        if flat and not peaks[3] <= 1.25 * peaks[1] + 8:
            fail("resident memory grows with the number of lines")


def assets(base, path):
    """The register's rows that the service answers with a result, each cut at its id."""
    with open(path, "rb") as register:
        rows = [row for row in register.read().splitlines() if row.strip()]
    request = urllib.request.Request(base + "/v1/bulk/depths?detail=brief", b"\n".join(rows), {"Content-Type": TYPE})
    with urllib.request.urlopen(request) as response:
        answers = response.read().splitlines()
    good = []
    for row, answer in zip(rows, answers):
        if b'"result"' not in answer:
            continue
        request = json.loads(row)
        request.pop("id", None)
        good.append(json.dumps(request, separators=(",", ":")).encode()[1:])
    print(f"{len(rows)} rows in the register, {len(good)} of them with a result")
    if len(good) < 100:
        fail("too few rows of the register have a result; the first answer is " + answers[0].decode())
    return good


def is_bad(number, share):
    """Spreads bad lines evenly, but not on a beat with the register."""
    return int((number + 1) * share) > int(number * share)


def line(number, good, share):
    if is_bad(number, share):
        return BAD[number // 7 % len(BAD)] % number
    return b'{"id":%d,' % number + good[number % len(good)]


def blocks(count, good, share):
    for first in range(0, count, BLOCK):
        yield b"\n".join(line(n, good, share) for n in range(first, min(first + BLOCK, count))) + b"\n"


def full_duplex(base, query, body):
    """Sends from a second thread while answers are read."""
    address = urllib.parse.urlsplit(base)
    connection = http.client.HTTPConnection(address.hostname, address.port, timeout=120)
    connection.putrequest("POST", "/v1/bulk/depths?" + query)
    connection.putheader("Content-Type", TYPE)
    connection.putheader("Transfer-Encoding", "chunked")
    connection.endheaders()
    # Not connection.send: an answer with Connection: close has http.client forget its socket and open another one.
    socket = connection.sock

    def send():
        for block in body:
            socket.sendall(b"%x\r\n%s\r\n" % (len(block), block))
        socket.sendall(b"0\r\n\r\n")

    sender = threading.Thread(target=send, daemon=True)
    sender.start()
    response = connection.getresponse()
    if response.status != 200:
        fail(f"status {response.status}: {response.read(4096)!r}")
    while piece := response.read1(1 << 18):
        yield piece
    sender.join(10)
    if sender.is_alive():
        fail("the answer ended before all was sent")


def half_duplex(base, query, body):
    """Sends all before it reads a byte, as urllib does with a body that is bytes."""
    data = b"".join(body)
    print(f"sending {len(data)} bytes before reading one")
    request = urllib.request.Request(base + "/v1/bulk/depths?" + query, data, {"Content-Type": TYPE})
    with urllib.request.urlopen(request, timeout=600) as response:
        while piece := response.read(1 << 18):
            yield piece


def check(pieces, count, good, share):
    """Reads answers and checks them; returns their bytes."""
    digest, rest, number, problems, size = hashlib.sha256(), b"", 0, 0, 0
    first = {}
    last = None
    for piece in pieces:
        size += len(piece)
        lines = (rest + piece).split(b"\n")
        rest = lines.pop()
        for text in lines:
            if last is not None:
                fail(f"a line after the end line: {text[:200]!r}")
            if text.startswith(b'{"end"'):
                last = json.loads(text)
                continue
            digest.update(text + b"\n")
            answer = json.loads(text)
            if answer.get("line") != number + 1:
                fail(f"line {number + 1} expected: {text[:200]!r}")
            if is_bad(number, share):
                problems += 1
                if "problem" not in answer or "result" in answer:
                    fail(f"line {number + 1} is bad and got no problem: {text[:200]!r}")
                if not 400 <= answer["problem"]["status"] < 500:
                    fail(f"line {number + 1}: {text[:300]!r}")
            else:
                if "result" not in answer or answer.get("id") != number:
                    fail(f"line {number + 1} is good and got no result under its id: {text[:300]!r}")
                result = text[text.index(b'"result":') :]
                if first.setdefault(number % len(good), result) != result:
                    fail(f"line {number + 1}: the same asset got another result than before")
            number += 1
    if rest:
        fail(f"the stream ends inside a line: {rest[:200]!r}")
    if last is None:
        fail(f"no end line after {number} answers: the stream was cut")
    want = {"end": True, "lines": count, "problems": problems, "sha256": digest.hexdigest()}
    if last != want or number != count:
        fail(f"{number} answers, end line {last}, want {want}")
    return size, problems


def main():
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("base", help="address of a running service: http://127.0.0.1:8080")
    parser.add_argument("--lines", type=int, default=1_000_000)
    parser.add_argument("--bad", type=float, default=0.0, help="share of bad lines")
    parser.add_argument("--pid", type=int, help="process whose resident memory is watched")
    parser.add_argument("--half", action="store_true", help="send all before reading")
    parser.add_argument("--detail", default="brief", choices=["brief", "full"])
    parser.add_argument("--register", default=os.path.join(os.path.dirname(__file__), "..", "testdata", "ostermere.ndjson"))
    options = parser.parse_args()

    good = assets(options.base, options.register)
    memory = Memory(options.pid) if options.pid else None
    if memory:
        memory.start()
    began = time.monotonic()
    transport = half_duplex if options.half else full_duplex
    body = blocks(options.lines, good, options.bad)
    size, problems = check(transport(options.base, "detail=" + options.detail, body), options.lines, good, options.bad)
    seconds = time.monotonic() - began
    print(f"{options.lines} lines answered in order, {problems} with a problem, {size / 1e6:.1f} MB, hash right, {seconds:.1f} s, {options.lines / seconds:.0f} lines/s")
    if memory:
        # Half duplex holds answers back by design: up to the bound in memory, then on disk.
        memory.report(flat=not options.half)


if __name__ == "__main__":
    main()
