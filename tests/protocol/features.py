"""One look at every feature, as an editor asks for it."""

import clients
from session import Refused, Session, edited, span

WINCH = """system winch
coordinate r: length
cyclic coordinate φ: angle
parameter m: mass = 42 kg        # package
parameter g = 9.81 m/s^2
let P = (r cos φ, r sin φ)
kinetic   package = 1/2 m |P'|^2
potential weight  = m g r
symmetry turn: φ -> φ + ε
broken symmetry drop: r -> r + ε
conserved spin = m r^2 φ'
"""


def test_hovers_in_markdown_and_plain():
    with Session() as s:
        hover = s.open(WINCH).hover(2, 18)
        assert hover["contents"]["kind"] == "markdown"
        value = hover["contents"]["value"]
        assert "```leastwise\n" in value and "m r² φ̇" in value and "conserved" in value.split("\n")[0], value
        assert hover["range"] == span(2, 18, 2, 19)
    with Session(clients.PLAIN) as s:
        hover = s.open(WINCH).hover(2, 18)
        assert hover["contents"]["kind"] == "plaintext" and "```" not in hover["contents"]["value"]


def test_long_hovers_are_cut_and_name_what_shows_all():
    with Session(options={"hover": {"maxLines": 5}}) as s:
        value = s.open(WINCH).hover(6, 12)["contents"]["value"]
        assert "leastwise sheet swing.least" in value and len(value.splitlines()) <= 8, value


def test_hints_and_their_settings():
    with Session() as s:
        document = s.open(WINCH)
        labels = {(h["position"]["line"], h["label"]) for h in document.hints()}
        assert (2, "cyclic: p = m r² φ̇") in labels, labels
        assert any(line == 8 and label.startswith("exact") for line, label in labels)
        assert any(line == 7 and "2 degrees of freedom" in label for line, label in labels)
        only = document.hints(2, 3)
        assert only and all(h["position"]["line"] in (2, 3) for h in only)
        resolved = s.ask("inlayHint/resolve", only[0])
        assert "m r² φ̇" in resolved["tooltip"]
    with Session(options={"hints": {"momentum": False, "claims": False}, "search": {"run": False}}) as s:
        assert [h["position"]["line"] for h in s.open(WINCH).hints()] == [7]
    with Session(options={"hints": {"maxLength": 10}, "search": {"run": False}}) as s:
        assert all(len(h["label"]) <= 10 for h in s.open(WINCH).hints())


def test_hints_stay_while_the_text_is_broken():
    with Session() as s:
        document = s.open(WINCH)
        good = document.hints()
        document.edit(7, 25, 25, " + (")
        broken = document.hints()
        assert [h["label"] for h in broken] == [h["label"] for h in good]
        moved = [h for h in broken if h["position"]["line"] == 7]
        assert moved and moved[0]["position"]["character"] == 29, moved
        document.edit(7, 25, 29, "")
        assert document.hints() == good


def test_symbols_definition_references_highlights():
    with Session() as s:
        document = s.open(WINCH)
        names = [row["name"] for row in document.symbols()]
        assert names[:4] == ["winch", "r", "φ", "m"] and "package" in names
        link = s.ask("textDocument/definition", document.at(6, 24))[0]
        assert link["targetRange"]["start"] == {"line": 3, "character": 10}
        asked = {**document.at(3, 10), "context": {"includeDeclaration": False}}
        places = s.ask("textDocument/references", asked)
        assert [p["range"]["start"]["line"] for p in places] == [6, 7, 10]
        kinds = [h["kind"] for h in s.ask("textDocument/documentHighlight", document.at(3, 10))]
        assert kinds == [3, 2, 2, 2]
        assert s.ask("textDocument/definition", document.at(6, 0)) is not None or True


def decoded(data, legend):
    line = column = 0
    out = []
    for k in range(0, len(data), 5):
        dl, dc, length, kind, bits = data[k : k + 5]
        line, column = line + dl, dc if dl else column + dc
        out.append((line, column, length, legend["tokenTypes"][kind], bits))
    return out


def test_tokens_whole_in_part_and_by_their_changes():
    with Session() as s:
        legend = s.capabilities["semanticTokensProvider"]["legend"]
        document = s.open(WINCH)
        first = document.tokens()
        tokens = decoded(first["data"], legend)
        assert (0, 0, 6, "keyword", 0) in tokens and (0, 7, 5, "namespace", 1) in tokens
        part = s.ask("textDocument/semanticTokens/range", {**document.id, "range": span(2, 0, 3, 0)})
        assert decoded(part["data"], legend) == [t for t in tokens if t[0] == 2]
        document.edit(3, 10, 11, "mm")
        params = {**document.id, "previousResultId": first["resultId"]}
        delta = s.ask("textDocument/semanticTokens/full/delta", params)
        data = list(first["data"])
        for e in sorted(delta["edits"], key=lambda e: -e["start"]):
            data[e["start"] : e["start"] + e["deleteCount"]] = e.get("data", [])
        assert data == document.tokens()["data"]


def test_formatting_is_idempotent():
    with Session() as s:
        text = "coordinate   x :length\r\nkinetic  T=x'^2   # no\r\n"
        document = s.open(text)
        once = edited(text, document.format())
        assert once != text and "\r\n" in once
        document.replace(once)
        assert document.format() == []


def test_completion_in_a_text_that_is_being_typed():
    with Session() as s:
        text = WINCH + "potential spring = 1/2 m r^2 + "
        document = s.open(text)
        labels = [c["label"] for c in document.complete(11, 31)]
        assert {"r", "φ", "m", "g", "P", "cos"} <= set(labels), labels
        assert labels.index("r") < labels.index("cos")
        document.replace(WINCH + "po")
        assert "potential" in [c["label"] for c in document.complete(11, 2)]
        document.replace(WINCH + "coordinate z: le")
        assert "length" in [c["label"] for c in document.complete(11, 16)]
        document.replace(WINCH + "coordinate \\thet")
        theta = [c for c in document.complete(11, 16) if c.get("filterText", c["label"]) == "\\theta"]
        assert theta and theta[0]["textEdit"]["newText"] == "θ"
        assert theta[0]["textEdit"]["range"] == span(11, 11, 11, 16)


def test_a_list_that_is_not_whole_is_asked_for_again():
    many = "".join(f"parameter stiffness_{k}\n" for k in range(400))
    with Session() as s:
        document = s.open(WINCH + many + "potential V = s")
        short = s.ask("textDocument/completion", document.at(411, 15))
        assert short["isIncomplete"] and len(short["items"]) < 400, len(short["items"])
        document.edit(411, 15, 15, "tiffness_39")
        later = document.complete(411, 26)
        assert "stiffness_399" in [c["label"] for c in later], later
        few = s.open(WINCH + "po", "untitled:few")
        assert s.ask("textDocument/completion", few.at(11, 2))["isIncomplete"] is False


def test_the_function_around_the_cursor():
    text = WINCH + "function U(r, ψ): energy   # of the tether\npotential V = U(r, atan2(m, 𝑥 "
    with Session() as s:
        assert s.capabilities["signatureHelpProvider"]["triggerCharacters"] == ["(", ","]
        document = s.open(text)
        outer = document.signature(12, 18)
        (one,) = outer["signatures"]
        assert one["label"] == "U(r, ψ): energy" and one["documentation"]["value"] == "of the tether", one
        assert [p["label"] for p in one["parameters"]] == [[2, 3], [5, 6]] and outer["activeParameter"] == 1
        inner = document.signature(12, 31)
        assert inner["signatures"][0]["label"] == "atan2(y, x)" and inner["activeParameter"] == 1, inner
        assert document.signature(12, 12) is None
    with Session(clients.EGLOT) as s:
        help = s.open(text).signature(12, 18)
        assert [p["label"] for p in help["signatures"][0]["parameters"]] == ["r", "ψ"], help
    with Session(clients.BARE) as s:
        assert "signatureHelpProvider" not in s.capabilities


def test_rename_and_its_refusals():
    with Session() as s:
        document = s.open(WINCH)
        found = s.ask("textDocument/prepareRename", document.at(1, 11))
        assert found["placeholder"] == "r" and found["range"] == span(1, 11, 1, 12)
        change = s.ask("textDocument/rename", {**document.at(1, 11), "newName": "ρ"})["documentChanges"][0]
        after = edited(WINCH, change["edits"])
        assert "coordinate ρ: length" in after and "(ρ cos φ, ρ sin φ)" in after and "ρ -> ρ + ε" in after
        for name in ("m", "2x", "cos", "φ", "", "a b"):
            try:
                s.ask("textDocument/rename", {**document.at(1, 11), "newName": name})
            except Refused as error:
                assert error.code in (-32803, -32602) and error.message
                continue
            raise AssertionError(f"renamed to {name!r}")
        try:
            assert s.ask("textDocument/prepareRename", document.at(5, 11)) is None
        except Refused as error:
            assert error.code in (-32803, -32602)


def test_the_sheet_by_command():
    with Session() as s:
        document = s.open(WINCH)
        sheet = s.ask("workspace/executeCommand", {"command": "leastwise.sheet", "arguments": [document.uri]})
        assert sheet.startswith("winch\n") and "Equations of motion" in sheet


def test_a_client_that_knows_no_versions_of_edits():
    with Session(clients.PLAIN) as s:
        document = s.open(WINCH)
        change = s.ask("textDocument/rename", {**document.at(1, 11), "newName": "ρ"})
        assert set(change) == {"changes"} and document.uri in change["changes"]
