#!/usr/bin/env python3
"""What a keystroke costs the language server: from the changed text to diagnostics, a hover and the hints of the visible part.

    keystrokes.py PROGRAM              instructions for each keystroke, counted under callgrind, held to keystrokes.tsv
    keystrokes.py PROGRAM --update     writes that table anew
    keystrokes.py PROGRAM --times      the time of a keystroke in milliseconds as an editor would see it; asserts nothing

A summand is typed letter by letter at the end of a model's last potential; on the way the text is broken now and then, as
it is under a hand. The count is the difference of a conversation with the typing and one without, over the letters.
"""

import json
import pathlib
import re
import statistics
import subprocess
import sys
import time

import problems

HERE = pathlib.Path(__file__).resolve().parent
ROOT = HERE.parent.parent
TABLE = HERE / "keystrokes.tsv"
VISIBLE = 50  # lines
TOLERANCE = 0.10


class Server:
    """A conversation with `leastwise lsp`, as an editor that is told diagnostics leads it."""

    def __init__(self, command):
        self.process = subprocess.Popen(command, stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
        self.number = 0
        capabilities = {
            "general": {"positionEncodings": ["utf-16"]},
            "textDocument": {
                "hover": {"contentFormat": ["markdown"]},
                "publishDiagnostics": {"versionSupport": True, "relatedInformation": True},
            },
        }
        # A search runs beside, after a rest: it would be counted where it happens to fall.
        options = {"search": {"run": False}}
        self.ask("initialize", {"processId": None, "rootUri": None, "capabilities": capabilities, "initializationOptions": options})
        self.tell("initialized", {})

    def send(self, message):
        body = json.dumps({"jsonrpc": "2.0", **message}).encode()
        self.process.stdin.write(b"Content-Length: %d\r\n\r\n" % len(body) + body)
        self.process.stdin.flush()

    def receive(self):
        length = None
        while (line := self.process.stdout.readline()) != b"\r\n":
            if not line:
                raise EOFError("the server ended")
            name, _, value = line.partition(b":")
            if name.lower() == b"content-length":
                length = int(value)
        return json.loads(self.process.stdout.read(length))

    def tell(self, method, params):
        self.send({"method": method, "params": params})

    def ask(self, method, params):
        self.number += 1
        self.send({"id": self.number, "method": method, "params": params})
        while (message := self.receive()).get("id") != self.number or "method" in message:
            pass
        if "error" in message:
            raise RuntimeError(f"{method}: {message['error']}")
        return message["result"]

    def diagnostics(self, version):
        while True:
            message = self.receive()
            if message.get("method") == "textDocument/publishDiagnostics" and message["params"]["version"] == version:
                return message["params"]["diagnostics"]

    def end(self):
        self.ask("shutdown", None)
        self.tell("exit", None)
        return self.process.communicate(timeout=600)[1].decode()


def models():
    """The models by name, each with its text and the name of a coordinate."""
    for path in sorted((ROOT / "grammar" / "examples").glob("*.least")):
        text = path.read_text()
        if "coordinate" in text:
            yield path.stem, text, path.as_uri()
    yield "links_10", problems.links(10).model, "untitled:links_10"
    yield "bodies_8", problems.bodies(8).model, "untitled:bodies_8"


def typing(text):
    """Where a summand is typed, its letters, and where the hover is: lines and UTF-16 columns."""
    lines = text.split("\n")
    width = lambda s: len(s.encode("utf-16-le")) // 2
    declared = next(k for k, l in enumerate(lines) if re.match(r"(cyclic )?coordinate ", l))
    column = lines[declared].index("coordinate ") + len("coordinate ")
    name = re.match(r"\w+(\[\w+\])?", lines[declared][column:])[0]
    member = re.sub(r"\[\w+\]", "[1]", name)
    heads = [k for k, l in enumerate(lines) if re.match(r"(potential|lagrangian|kinetic)\b", l)]
    potentials = [k for k in heads if lines[k].startswith("potential")] or heads
    line = potentials[-1]
    while line + 1 < len(lines) and lines[line + 1].startswith(" ") and lines[line + 1].strip():
        line += 1
    code = lines[line].split("#")[0].rstrip()
    return (line, width(code)), f" + 3/1009 {member}^2", (declared, width(lines[declared][:column]))


def conversation(command, text, uri, letters_typed):
    """Opens the model and types. Returns the seconds of each keystroke and what the server wrote to its error stream."""
    (line, column), summand, (hover_line, hover_column) = typing(text)
    server = Server(command)
    document = {"uri": uri, "languageId": "leastwise", "version": 1, "text": text}
    server.tell("textDocument/didOpen", {"textDocument": document})
    whole = {"start": {"line": 0, "character": 0}, "end": {"line": VISIBLE, "character": 0}}
    seconds = []

    def look():
        place = {"textDocument": {"uri": uri}}
        server.ask("textDocument/hover", {**place, "position": {"line": hover_line, "character": hover_column}})
        server.ask("textDocument/inlayHint", {**place, "range": whole})

    server.diagnostics(1)
    look()
    for k, letter in enumerate(summand if letters_typed else ""):
        at = {"line": line, "character": column + k}
        change = {"range": {"start": at, "end": at}, "text": letter}
        begin = time.perf_counter()
        server.tell(
            "textDocument/didChange",
            {"textDocument": {"uri": uri, "version": k + 2}, "contentChanges": [change]},
        )
        found = server.diagnostics(k + 2)
        look()
        seconds.append(time.perf_counter() - begin)
    if letters_typed and any(d["severity"] == 1 for d in found):
        raise RuntimeError(f"what was typed is wrong: {found}")
    return seconds, server.end()


def counted(program, text, uri):
    """Instructions for each keystroke, on average."""
    command = ["valgrind", "--tool=callgrind", "--callgrind-out-file=/dev/null", program, "lsp"]
    totals = []
    for typed in (False, True):
        seconds, told = conversation(command, text, uri, typed)
        totals.append(int(re.search(r"Collected : (\d+)", told)[1]))
    return (totals[1] - totals[0]) // len(seconds)


def main():
    program, *flags = sys.argv[1:]
    if "--times" in flags:
        for name, text, uri in models():
            seconds = [s for _ in range(5) for s in conversation([program, "lsp"], text, uri, True)[0]]
            print(f"{name:<24} median {1e3 * statistics.median(seconds):6.2f} ms   most {1e3 * max(seconds):6.2f} ms")
        return 0
    try:
        subprocess.run(["valgrind", "--version"], capture_output=True, check=True)
    except OSError:
        print("not run: instructions per keystroke (needs valgrind)")
        return 0
    known = {}
    if TABLE.exists():
        rows = [row.split("\t") for row in TABLE.read_text().splitlines() if not row.startswith("#")]
        known = {name: int(count) for name, count in rows}
    passed = failed = 0
    rows = ["# Instructions of the language server for each keystroke, counted by callgrind."]
    for name, text, uri in models():
        count = counted(program, text, uri)
        rows.append(f"{name}\t{count}")
        change = count / known[name] - 1 if name in known else 0.0
        good = "--update" in flags or (name in known and change <= TOLERANCE)
        passed, failed = passed + good, failed + (not good)
        print(f"{'ok  ' if good else 'FAIL'} {name:<24} {count:>12}  {100 * change:+.1f} %", flush=True)
    if "--update" in flags:
        TABLE.write_text("\n".join(rows) + "\n")
    print(f"{passed} passed, {failed} failed")
    return int(failed > 0)


if __name__ == "__main__":
    sys.exit(main())
