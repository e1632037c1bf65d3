"""Every kind of client asks for everything; `allowed.py` tells what it could not have taken."""

import clients
from features import WINCH
from session import Session, edited, span

SLIPS = WINCH + "index k: 1..3\ninput u\nparameter unused\npotential spring = 1/2 b r^2\n"


def ask_everything(client):
    with Session(client, settings={}) as s:
        document = s.open(SLIPS)
        found = document.pull()["items"] if "diagnosticProvider" in s.capabilities else document.unversioned()
        assert {"undeclared-name"} <= {d["code"] for d in found}, found
        for line in range(15):
            for column in (0, 11, 20):
                document.hover(line, column)
                s.ask("textDocument/definition", document.at(line, column))
                document.complete(line, column)
                if "signatureHelpProvider" in s.capabilities:
                    document.signature(line, column)
        assert document.symbols() and document.tokens()["data"] and document.hints()
        slip = next(d for d in found if d["code"] == "undeclared-name")
        actions = document.actions(slip)
        whole = {**document.id, "range": span(0, 0, 99, 0), "context": {"diagnostics": []}}
        s.ask("textDocument/codeAction", whole)
        change = s.ask("textDocument/rename", {**document.at(1, 11), "newName": "ρ"})
        edits = change["changes"][document.uri] if "changes" in change else change["documentChanges"][0]["edits"]
        assert "coordinate ρ: length" in edited(SLIPS, edits, s.capabilities.get("positionEncoding", "utf-16"))
        document.replace(WINCH)
        document.format()
        document.close()
        return actions


def test_a_bare_client():
    assert not ask_everything(clients.BARE), "code actions for a client that knows commands only"


def test_a_plain_client():
    assert ask_everything(clients.PLAIN)


def test_a_client_that_can_nearly_everything():
    assert ask_everything(clients.FULL)


def test_visual_studio_code():
    assert ask_everything(clients.VSCODE)


def test_neovim():
    assert ask_everything(clients.NEOVIM)


def test_eglot():
    assert ask_everything(clients.EGLOT)
