"""A live sheet session with nothing but the standard library: two sheets are
handed over, a cell changes, and the server tells which results that altered.

    python3 client.py [path of halfwidth-server]
"""

import json
import os
import subprocess
import sys

server = subprocess.Popen(sys.argv[1:2] or ["halfwidth-server"], stdin=subprocess.PIPE, stdout=subprocess.PIPE)


def send(message):
    body = json.dumps({"jsonrpc": "2.0", **message}).encode()
    server.stdin.write(b"Content-Length: %d\r\n\r\n%s" % (len(body), body))
    server.stdin.flush()


def receive():
    length = 0
    while line := server.stdout.readline().strip():
        name, value = line.split(b":", 1)
        if name.lower() == b"content-length":
            length = int(value)
    if not length:
        sys.exit("the server closed its output")
    return json.loads(server.stdout.read(length))


def notify(method, **params):
    send({"method": method, "params": params})


waiting = []  # notifications that came before the reply asked for


def ask(method, **params):
    send({"id": method, "method": method, "params": params})
    while (message := receive()).get("id") != method:
        waiting.append(message)
    if "error" in message:
        sys.exit(message["error"]["message"])
    return message["result"]


def published(sheet, version):
    """Waits for the results of a version of a sheet, as a dictionary of cells."""
    while True:
        message = waiting.pop(0) if waiting else receive()
        if message["method"] == "sheets/refused":
            sys.exit(message["params"]["error"]["message"])
        if message["method"] == "sheets/publishResults" and message["params"]["versions"].get(sheet) == version:
            return {cell["cell"]: cell["value"] for cell in message["params"]["cells"]}


welcome = ask("initialize", processId=os.getpid(), capabilities={})
assert "sheets/didOpen" in welcome["capabilities"]["experimental"]["halfwidth"]["methods"]
notify("initialized")

trips = [["depot", "minutes"], ["North", 12], ["Quay", 20], ["North", 14]]
notify("sheets/didOpen", book="larkmoor", sheet="Trips", version=1, cells=[{"at": "A1", "rows": trips}])
questions = [["work out", "sample", "> mean", "> status"], ["mean-interval", "minutes in Trips where depot = North"]]
notify("sheets/didOpen", book="larkmoor", sheet="Calculations", version=1, cells=[{"at": "A1", "rows": questions}])
cells = published("Calculations", 1)
assert cells["C2"] == 13, cells  # (12 + 14) / 2
print(f"North: {cells['C2']} minutes ({cells['D2']})")

notify("sheets/didChange", book="larkmoor", sheet="Trips", baseVersion=1, version=2, cells=[{"at": "B4", "rows": [[16]]}])
cells = published("Trips", 2)
assert cells["C2"] == 14, cells  # (12 + 16) / 2
print(f"North, one trip corrected: {cells['C2']} minutes")

# Expressions may name the open sheets; the numbers are those of the sheet.
outcome = ask("functions/answer", name="mean-interval", book="larkmoor", arguments={"sample": "minutes in Trips where depot = North"})
assert outcome["results"]["mean"] == 14, outcome

notify("sheets/didClose", book="larkmoor")
ask("shutdown")
notify("exit")
assert server.wait(timeout=10) == 0
print(f"{welcome['serverInfo']['name']} {welcome['serverInfo']['version']} ended with 0")
