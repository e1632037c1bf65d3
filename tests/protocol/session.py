"""A conversation with the program. Every message of the server is checked as it comes."""

import json
import os
import queue
import subprocess
import threading

from allowed import Allowed
from clients import PUSHED
from model import model

PROGRAM = None
WAIT = 60  # seconds until the server counts as hung


class Wrong(AssertionError):
    """The server said something that it may not say."""


class Refused(Exception):
    """The server answered with an error."""

    def __init__(self, error):
        super().__init__(f"{error['code']}: {error['message']}")
        self.code, self.message = error["code"], error["message"]


class Session:
    """Opened as a client with these abilities; `with Session() as s:` ends it politely and looks at the exit status."""

    def __init__(self, client=PUSHED, options=None, environment=None, begin=True, settings=None):
        self.client, self.settings = client, settings
        self.process = subprocess.Popen(
            [PROGRAM, "lsp"],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL,
            env={**os.environ, **(environment or {})},
        )
        self.inbox = queue.Queue()
        threading.Thread(target=self._read, daemon=True).start()
        self.number = 0
        self.open_requests = {}
        self.answers = {}
        self.published = {}
        self.told = []
        self.progress = {}
        self.refuses = set()
        self.asked = []
        self.texts = {}
        self.sent = {}
        self.allowed = Allowed(client)
        if begin:
            params = {"processId": os.getpid(), "rootUri": None, "capabilities": client}
            if options is not None:
                params["initializationOptions"] = options
            self.capabilities = self.ask("initialize", params)["capabilities"]
            self.tell("initialized", {})

    # What goes out.

    def raw(self, data):
        self.process.stdin.write(data)
        self.process.stdin.flush()

    def send(self, message):
        body = json.dumps({"jsonrpc": "2.0", **message}, ensure_ascii=False).encode()
        self.raw(b"Content-Length: %d\r\n\r\n" % len(body) + body)

    def tell(self, method, params):
        self.send({"method": method, "params": params} if params is not None else {"method": method})

    def begin(self, method, params):
        """Asks and does not wait. The number of the request."""
        self.number += 1
        self.open_requests[self.number] = method
        message = {"id": self.number, "method": method}
        self.send({**message, "params": params} if params is not None else message)
        return self.number

    def ask(self, method, params):
        return self.answer(self.begin(method, params))

    def cancel(self, number):
        self.tell("$/cancelRequest", {"id": number})

    # What comes in.

    def _read(self):
        stream = self.process.stdout
        while True:
            length = None
            while (line := stream.readline()) not in (b"\r\n", b""):
                name, _, value = line.partition(b":")
                if name.lower() == b"content-length":
                    length = int(value)
            if length is None:
                self.inbox.put(None)
                return
            body = stream.read(length)
            if len(body) < length:
                self.inbox.put(None)
                return
            self.inbox.put(json.loads(body))

    def next(self, wait=WAIT):
        """Takes one message in and checks it. Whether there was one."""
        message = self.inbox.get(timeout=wait)
        if message is None:
            raise EOFError("the server ended")
        if message.pop("jsonrpc", None) != "2.0":
            raise Wrong("no JSON-RPC 2.0")
        if "method" in message:
            self._news(message)
        else:
            self._answer(message)

    def _answer(self, message):
        number = message.get("id")
        extra = set(message) - {"id", "result", "error"}
        if extra or ("result" in message) == ("error" in message):
            raise Wrong(f"a strange answer: {message}")
        if number is None:
            self._check_error(message["error"])
            self.told.append(("error", message["error"]))
            return
        method = self.open_requests.pop(number, None)
        if method is None:
            raise Wrong(f"an answer to nothing: {number}")
        if "result" in message and method in model().requests:
            errors = model().errors(method, "result", message["result"])
            if errors:
                raise Wrong(errors[0])
            self._complain(self.allowed.result(method, message["result"]))
        if "error" in message:
            self._check_error(message["error"])
        self.answers[number] = message

    def _check_error(self, error):
        if set(error) - {"code", "message", "data"} or type(error["code"]) is not int or not error["message"]:
            raise Wrong(f"a strange error: {error}")

    def _news(self, message):
        method, params = message["method"], message.get("params")
        known = model().requests if "id" in message else model().notifications
        if method not in known:
            raise Wrong(f"an unknown method: {method}")
        if errors := model().errors(method, "params", params):
            raise Wrong(errors[0])
        self._complain(self.allowed.news(method, params))
        if "id" in message:
            self.asked.append((method, params))
            result = None
            if method == "workspace/configuration":
                result = [self.settings for _ in params["items"]]
            if method == "workspace/applyEdit":
                result = {"applied": True}
            if method == "window/workDoneProgress/create":
                if params["token"] in self.progress:
                    raise Wrong(f"a token twice: {params['token']}")
                self.progress[params["token"]] = "refused" if method in self.refuses else "created"
            if self.process.poll() is None:
                refusal = {"error": {"code": -32603, "message": "not now"}}
                self.send({"id": message["id"], **(refusal if method in self.refuses else {"result": result})})
        elif method == "textDocument/publishDiagnostics":
            uri, version = params["uri"], params.get("version")
            if version is not None and uri in self.sent:
                self._in_order(uri, version)
            self.published.setdefault(uri, []).append((version, params["diagnostics"]))
        else:
            if method == "$/progress":
                self._progress(params["token"], params["value"]["kind"])
            self.told.append((method, params))

    def _progress(self, token, kind):
        """Each token is created, begun, reported of and ended, in this order."""
        state = self.progress.get(token)
        if (state, kind) not in (("created", "begin"), ("begun", "report"), ("begun", "end")):
            raise Wrong(f"{kind} of what is {state}: {token}")
        self.progress[token] = {"begin": "begun", "end": "ended"}.get(kind, state)

    def _complain(self, complaints):
        for complaint in complaints:
            raise Wrong(complaint)

    def _in_order(self, uri, version):
        """Only versions that were sent, and none after a newer one."""
        sent, last = self.sent[uri]
        if version not in sent[last:]:
            raise Wrong(f"diagnostics of version {version}, which is not or no longer due: {sent[last:][:3]}")
        self.sent[uri][1] = sent.index(version, last)

    def answer(self, number, wait=WAIT):
        """The result of a request. Raises `Refused` for an error."""
        while number not in self.answers:
            self.next(wait)
        message = self.answers.pop(number)
        if "error" in message:
            raise Refused(message["error"])
        return message["result"]

    def until(self, ready, wait=WAIT):
        while not ready():
            self.next(wait)

    def drain(self):
        """Takes in what has come."""
        while not self.inbox.empty():
            self.next()

    # Documents.

    def open(self, text, uri="file:///observatory/swing.least", version=1):
        document = {"uri": uri, "languageId": "leastwise", "version": version, "text": text}
        self.texts[uri] = [version, text]
        self.published.pop(uri, None)
        before = self.sent.get(uri)
        self.sent[uri] = [before[0] + [version] if before else [version], before[1] if before else 0]
        self.tell("textDocument/didOpen", {"textDocument": document})
        return Document(self, uri)

    def end(self):
        self.ask("shutdown", None)
        self.tell("exit", None)
        return self.process.wait(timeout=WAIT)

    def _to_the_end(self):
        """What came last is checked too."""
        try:
            while True:
                self.next(10)
        except EOFError:
            return

    def __enter__(self):
        return self

    def __exit__(self, kind, value, trace):
        try:
            if kind is None and self.process.poll() is None:
                self.drain()
                status = self.end()
                assert status == 0, f"exit status {status}"
                self._to_the_end()
                if "begun" in self.progress.values():
                    raise Wrong(f"begun and never ended: {self.progress}")
                if self.open_requests:
                    raise Wrong(f"never answered: {self.open_requests}")
        finally:
            self.process.kill()
            self.process.wait()


class Document:
    """An open document, and the questions that are asked of it."""

    def __init__(self, session, uri):
        self.session, self.uri = session, uri
        self.id = {"textDocument": {"uri": uri}}

    @property
    def version(self):
        return self.session.texts[self.uri][0]

    def change(self, *changes, version=None):
        version = self.version + 1 if version is None else version
        self.session.texts[self.uri][0] = version
        self.session.sent[self.uri][0].append(version)
        self.session.tell(
            "textDocument/didChange",
            {"textDocument": {"uri": self.uri, "version": version}, "contentChanges": list(changes)},
        )

    def replace(self, text):
        self.change({"text": text})

    def edit(self, line, start, end, text):
        self.change({"range": span(line, start, line, end), "text": text})

    def diagnostics(self):
        """Those of the version as it is now."""
        seen = lambda: [d for v, d in self.session.published.get(self.uri, []) if v == self.version]
        self.session.until(seen)
        return seen()[-1]

    def unversioned(self):
        """The first that are pushed, for a client that is told no versions."""
        self.session.until(lambda: self.session.published.get(self.uri))
        return self.session.published[self.uri][-1][1]

    def pull(self, previous=None):
        params = dict(self.id)
        if previous:
            params["previousResultId"] = previous
        return self.session.ask("textDocument/diagnostic", params)

    def at(self, line, character):
        return {**self.id, "position": {"line": line, "character": character}}

    def hover(self, line, character):
        return self.session.ask("textDocument/hover", self.at(line, character))

    def hints(self, first=0, last=10_000):
        return self.session.ask("textDocument/inlayHint", {**self.id, "range": span(first, 0, last, 0)})

    def symbols(self):
        return self.session.ask("textDocument/documentSymbol", self.id)

    def tokens(self):
        return self.session.ask("textDocument/semanticTokens/full", self.id)

    def complete(self, line, character):
        return self.session.ask("textDocument/completion", self.at(line, character))["items"]

    def signature(self, line, character):
        return self.session.ask("textDocument/signatureHelp", self.at(line, character))

    def actions(self, diagnostic):
        context = {"diagnostics": [diagnostic], "only": ["quickfix"]}
        return self.session.ask("textDocument/codeAction", {**self.id, "range": diagnostic["range"], "context": context})

    def rewrites(self, line):
        context = {"diagnostics": [], "only": ["refactor"]}
        return self.session.ask("textDocument/codeAction", {**self.id, "range": span(line, 0, line, 0), "context": context})

    def lenses(self):
        return self.session.ask("textDocument/codeLens", self.id)

    def format(self):
        options = {"tabSize": 4, "insertSpaces": True}
        return self.session.ask("textDocument/formatting", {**self.id, "options": options})

    def close(self):
        self.session.tell("textDocument/didClose", self.id)


def span(line, character, end_line, end_character):
    return {
        "start": {"line": line, "character": character},
        "end": {"line": end_line, "character": end_character},
    }


def edited(text, edits, encoding="utf-16"):
    """The text after edits whose places are all of the text as it is."""
    starts, at = [], 0
    for line in _lines(text):
        starts.append(at)
        at += len(line)

    def place(p):
        if p["line"] >= len(starts):
            return len(text)
        k, left = starts[p["line"]], p["character"]
        # A place inside of a letter is before it.
        while k < len(text) and text[k] not in "\r\n" and left >= width(text[k], encoding):
            left -= width(text[k], encoding)
            k += 1
        return k

    spans = sorted(((place(e["range"]["start"]), place(e["range"]["end"]), e["newText"]) for e in edits), reverse=True)
    for start, end, new in spans:
        text = text[:start] + new + text[end:]
    return text


def width(letter, encoding):
    return {"utf-8": len(letter.encode()), "utf-16": len(letter.encode("utf-16-le")) // 2, "utf-32": 1}[encoding]


def _lines(text):
    line = ""
    for k, c in enumerate(text):
        line += c
        if c == "\n" or (c == "\r" and text[k + 1 : k + 2] != "\n"):
            yield line
            line = ""
    yield line
