"""How a conversation begins, goes wrong and ends."""

import clients
from session import Refused, Session

MODEL = "coordinate x: length\nparameter m: mass = 2 kg\nkinetic T = 1/2 m x'^2\n"


def refused(code, act):
    try:
        act()
    except Refused as error:
        assert error.code == code, f"{error.code} in place of {code}"
        assert error.message
        return
    raise AssertionError(f"answered in place of {code}")


def test_requests_before_initialize():
    with Session(begin=False) as s:
        refused(-32002, lambda: s.ask("textDocument/hover", {"textDocument": {"uri": "file:///a"}, "position": {"line": 0, "character": 0}}))
        refused(-32002, lambda: s.ask("shutdown", None))
        s.tell("textDocument/didOpen", {"textDocument": {"uri": "file:///a", "languageId": "leastwise", "version": 1, "text": ""}})
        s.ask("initialize", {"processId": None, "rootUri": None, "capabilities": {}})
        s.tell("initialized", {})


def test_initialize_twice():
    with Session() as s:
        refused(-32600, lambda: s.ask("initialize", {"processId": None, "rootUri": None, "capabilities": {}}))


def test_requests_after_shutdown():
    s = Session()
    s.ask("shutdown", None)
    refused(-32600, lambda: s.ask("textDocument/hover", {"textDocument": {"uri": "file:///a"}, "position": {"line": 0, "character": 0}}))
    s.tell("exit", None)
    assert s.process.wait(timeout=10) == 0


def test_exit_alone_is_a_failure():
    s = Session()
    s.tell("exit", None)
    assert s.process.wait(timeout=10) == 1


def test_exit_before_initialize():
    s = Session(begin=False)
    s.tell("exit", None)
    assert s.process.wait(timeout=10) == 1


def test_the_end_of_the_input_ends_the_server():
    s = Session()
    s.open(MODEL)
    s.process.stdin.close()
    assert s.process.wait(timeout=10) == 1


def test_unknown_methods():
    with Session() as s:
        refused(-32601, lambda: s.ask("textDocument/prophecy", {}))
        s.tell("textDocument/prophecy", {})
        s.tell("$/prophecy", {"a": 1})
        refused(-32601, lambda: s.ask("workspace/symbol", {"query": "x"})) if "workspaceSymbolProvider" not in s.capabilities else None
        assert s.open(MODEL).hover(0, 11)


def test_bad_parameters():
    with Session() as s:
        refused(-32602, lambda: s.ask("textDocument/hover", {"textDocument": {}}))
        refused(-32602, lambda: s.ask("textDocument/hover", None))
        refused(-32602, lambda: s.ask("workspace/executeCommand", {"command": "leastwise.prophecy", "arguments": []}))
        refused(-32602, lambda: s.ask("workspace/executeCommand", {"command": "leastwise.sheet", "arguments": [3]}))
        s.tell("textDocument/didOpen", {"textDocument": 3})
        s.tell("textDocument/didChange", {"nothing": True})
        assert s.open(MODEL).hover(0, 11)


def test_unknown_documents():
    with Session() as s:
        place = {"textDocument": {"uri": "file:///nowhere.least"}, "position": {"line": 0, "character": 0}}
        for method in ("textDocument/hover", "textDocument/completion", "textDocument/definition"):
            refused(-32602, lambda: s.ask(method, place))
        s.tell("textDocument/didChange", {"textDocument": {"uri": "file:///nowhere.least", "version": 2}, "contentChanges": []})
        s.tell("textDocument/didClose", {"textDocument": {"uri": "file:///nowhere.least"}})
        assert s.open(MODEL).hover(0, 11)


def test_broken_messages():
    with Session() as s:
        document = s.open(MODEL)
        for junk in (
            b"Content-Length: 5\r\n\r\n{{{{{",
            b"Content-Length: 4\r\n\r\n\xff\xff\xff\xff",
            b"Content-Length: 99999999999999999999\r\n\r\n",
            b"Content-Length: minus one\r\n\r\n{}",
            b"X-Header: 1\r\n\r\n{}",
            b"Content-Length: 99999999999\r\n\r\n{}",
            b"\r\n\r\n\r\n",
        ):
            s.raw(junk)
            # What follows is understood.
            assert document.hover(0, 11), junk
        errors = [e["code"] for what, e in s.told if what == "error"]
        assert len(errors) >= 6 and set(errors) <= {-32700, -32600}, errors


def test_messages_that_are_no_requests():
    with Session() as s:
        document = s.open(MODEL)
        for body in (b"[]", b"3", b"{}", b'{"jsonrpc":"2.0"}', b'{"jsonrpc":"2.0","method":3,"id":null}', b"null"):
            s.raw(b"Content-Length: %d\r\n\r\n" % len(body) + body)
            assert document.hover(0, 11), body


def test_heads_in_lower_case_and_with_more_lines():
    with Session() as s:
        body = b'{"jsonrpc":"2.0","method":"$/nothing"}'
        s.raw(b"content-length: %d\r\nContent-Type: application/vscode-jsonrpc; charset=utf-8\r\n\r\n" % len(body) + body)
        assert s.open(MODEL).hover(0, 11)
        assert not [e for what, e in s.told if what == "error"]


def test_a_reply_to_nothing_is_ignored():
    with Session() as s:
        s.send({"id": 4711, "result": None})
        s.send({"id": "abc", "error": {"code": 1, "message": "no"}})
        assert s.open(MODEL).hover(0, 11)


def test_a_planted_panic_does_not_end_the_server():
    with Session(environment={"LEASTWISE_TEST_REQUESTS": "1"}) as s:
        document = s.open(MODEL)
        before = document.hover(0, 11)
        refused(-32603, lambda: s.ask("leastwise/testPanic", document.at(0, 0)))
        assert document.hover(0, 11) == before
        document.edit(1, 20, 21, "3")
        assert document.diagnostics() == []
        assert any("internal error" in p["message"] for m, p in s.told if m == "window/logMessage")


def test_the_panic_is_for_tests_only():
    with Session() as s:
        refused(-32601, lambda: s.ask("leastwise/testPanic", s.open(MODEL).at(0, 0)))


def test_a_bare_client_is_told_nothing_that_it_does_not_know():
    with Session(clients.BARE) as s:
        document = s.open("coordinate x\nkinetic 1/2 m x'^2\nparameter m, k\n")
        s.until(lambda: s.published.get(document.uri))
        hover = document.hover(0, 11)
        assert hover["contents"]["kind"] == "plaintext"
        assert all("selectionRange" not in row for row in document.symbols())
        assert not s.asked
