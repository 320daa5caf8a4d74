"""Asks Leat about every asset of a file, one request a line, and keeps the answers only if they are whole.

    python3 bulk.py REQUESTS.ndjson ANSWERS.ndjson [OPERATION]

Standard library only. LEAT_URL says where the service is.
"""
import hashlib
import json
import os
import sys
import urllib.error
import urllib.request


def ask(requests, operation="depths", url=os.environ.get("LEAT_URL", "http://127.0.0.1:8080")):
    """Returns the lines of the answers, as bytes, in the order of the requests, which are bytes too."""
    request = urllib.request.Request(f"{url}/v1/bulk/{operation}?detail=brief", requests, {"Content-Type": "application/x-ndjson"})
    try:
        with urllib.request.urlopen(request) as response:
            *lines, last = response.read().splitlines(keepends=True)
    except urllib.error.HTTPError as error:  # a problem says what is wrong with the whole request
        raise SystemExit(json.load(error)["detail"])
    end = json.loads(last)
    if not end.get("end") or end["sha256"] != hashlib.sha256(b"".join(lines)).hexdigest():
        raise SystemExit("the answer is not whole: " + last.decode())
    return lines


if __name__ == "__main__":
    with open(sys.argv[1], "rb") as file:
        answers = ask(file.read(), *sys.argv[3:])
    with open(sys.argv[2], "wb") as file:
        file.writelines(answers)
    for answer in map(json.loads, answers):
        if "problem" in answer:
            print(answer["line"], answer.get("id"), answer["problem"]["detail"])
