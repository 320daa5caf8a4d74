#!/usr/bin/env python3
"""Two thousand slow sockets beside normal requests: a quarter each send a header by drops, send a body by drops, read nothing of a long answer, and say
nothing. Normal requests go at a fixed rate before and during; their answers must be the same bytes, the service's resident memory must stay under a bound and their
99th percentile must not grow by more than a share.

usage: .ci/slow.py BASE --pid PID [--sockets 2000] [--seconds 20] [--settle 10] [--rate 100] [--memory-mib 128] [--worse 0.2]
"""
import argparse
import http.client
import json
import multiprocessing
import selectors
import socket
import sys
import time
import urllib.parse

NORMAL = json.dumps({
    "section": {"kind": "trapezoidal", "bottom_width": 0.7, "side_slope": 1, "bank_height": 1.1},
    "roughness": {"manning": 0.033}, "bed_slope": 0.003, "discharge": 0.463,
}).encode()
LONG = json.dumps({
    "section": {"kind": "rectangular", "bottom_width": 2}, "roughness": {"manning": 0.02}, "bed_slope": 0.001, "discharge": 1,
    "depths": [round(0.01 + i / 5000, 4) for i in range(4000)],
}).encode()


def head(path, length):
    return f"POST {path} HTTP/1.1\r\nHost: leat\r\nContent-Type: application/json\r\nContent-Length: {length}\r\n\r\n".encode()


KINDS = {
    "header": (b"POST /v1/depths HTTP/1.1\r\n", b"X: y\r\n"),
    "body": (head("/v1/depths", 100000) + b"{", b" "),
    "reader": (head("/v1/section", len(LONG)) + LONG, b""),
    "silent": (b"", b""),
}


def crowd(host, port, sockets, stop, report):
    """Keeps so many slow sockets open, and opens each anew that is cut."""
    opened, cut = 0, 0
    selector = selectors.DefaultSelector()

    def connect(kind):
        nonlocal opened
        s = socket.socket()
        if kind == "reader":
            s.setsockopt(socket.SOL_SOCKET, socket.SO_RCVBUF, 4096)
        s.connect((host, port))
        s.sendall(KINDS[kind][0])
        opened += 1
        if kind != "reader":
            selector.register(s, selectors.EVENT_READ)  # readable means cut, or refused
        return s

    held = [[kind, connect(kind), 0.0] for kind in KINDS for _ in range(sockets // len(KINDS))]
    report.put("ready")
    drop = 0
    while not stop.is_set():
        began = time.monotonic()
        ended = {key.fileobj for key, _ in selector.select(0)}
        for i, (kind, s, _) in enumerate(held):
            try:
                if s in ended:
                    raise ConnectionError
                if KINDS[kind][1] and i % 20 == drop % 20:  # each socket once in two seconds
                    s.sendall(KINDS[kind][1])
            except OSError:
                cut += 1
                if s in selector.get_map():
                    selector.unregister(s)
                s.close()
                held[i][1] = connect(kind)
        drop += 1
        time.sleep(max(0, 0.1 - (time.monotonic() - began)))
    report.put((opened, cut))


def normal(host, port, rate, seconds, want):
    """Requests at a fixed rate; a late one counts from when it was due."""
    times, refused, wrong = [], 0, 0
    connection = http.client.HTTPConnection(host, port, timeout=30)
    began = time.monotonic()
    for i in range(int(rate * seconds)):
        due = began + i / rate
        time.sleep(max(0, due - time.monotonic()))
        connection.request("POST", "/v1/depths", NORMAL, {"Content-Type": "application/json"})
        response = connection.getresponse()
        answer = response.read()
        times.append(time.monotonic() - due)
        if response.status == 503 and response.getheader("Retry-After"):
            refused += 1
        elif response.status != 200 or want not in (None, answer):
            wrong += 1
        want = want or answer
    connection.close()
    times.sort()
    return {"p50": times[len(times) // 2] * 1e3, "p99": times[int(len(times) * 0.99)] * 1e3, "refused": refused, "wrong": wrong}, want


def resident(pid, name):
    for line in open(f"/proc/{pid}/status"):
        if line.startswith(name + ":"):
            return int(line.split()[1]) / 1024
    sys.exit("no such process")


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("base")
    parser.add_argument("--pid", type=int, required=True)
    parser.add_argument("--sockets", type=int, default=2000)
    parser.add_argument("--seconds", type=float, default=20)
    parser.add_argument("--settle", type=float, default=10)
    parser.add_argument("--rate", type=float, default=100)
    parser.add_argument("--memory-mib", type=float, default=128)
    parser.add_argument("--worse", type=float, default=0.2)
    a = parser.parse_args()
    address = urllib.parse.urlsplit(a.base)
    where = (address.hostname, address.port)
    normal(*where, a.rate, 2, None)  # warm
    print(f"resident before: {resident(a.pid, 'VmRSS'):.1f} MiB")
    before, want = normal(*where, a.rate, a.seconds, None)
    print("before:", before)
    stop, report = multiprocessing.Event(), multiprocessing.Queue()
    slow = multiprocessing.Process(target=crowd, args=(*where, a.sockets, stop, report))
    slow.start()
    report.get()
    time.sleep(a.settle)  # the long answers are work like any other while they are made; what counts is what they do afterwards
    during, _ = normal(*where, a.rate, a.seconds, want)
    print("during:", during)
    stop.set()
    opened, cut = report.get()
    slow.join()
    after, _ = normal(*where, a.rate, 2, want)
    print("after: ", after)
    peak = resident(a.pid, "VmHWM")
    print(f"{a.sockets} slow sockets, {opened} opened in all, {cut} cut or refused; resident at most {peak:.1f} MiB; p99 {during['p99'] / before['p99']:.2f} times that before")
    faults = []
    if before["wrong"] + during["wrong"] + after["wrong"]:
        faults.append("wrong answers")
    if before["refused"] + after["refused"]:
        faults.append("refusals without a crowd")
    if cut == 0:
        faults.append("nothing was cut")
    if peak > a.memory_mib:
        faults.append(f"more than {a.memory_mib} MiB")
    if during["p99"] > before["p99"] * (1 + a.worse):
        faults.append(f"p99 worse by more than {a.worse:.0%}")
    sys.exit("; ".join(faults) or 0)


if __name__ == "__main__":
    main()
