"""Texts, places in them and changes of them: every letter counts, in every encoding."""

import random

import clients
from session import Session, edited, span, width

GREEK = "coordinate θ̇₁x: length\r\ncoordinate 𝑥, θ₁: angle\r\nparameter m = 2 kg # 𝑥𝑥\r\nkinetic T = 1/2 m (𝑥̇^2 + θ̇₁^2)\r\n"


def spoken(encoding):
    return {**clients.PUSHED, "general": {"positionEncodings": [encoding]}}


def test_a_place_is_the_same_in_every_encoding():
    found = []
    for encoding in ("utf-8", "utf-16", "utf-32"):
        with Session(spoken(encoding)) as s:
            assert s.capabilities["positionEncoding"] == encoding
            document = s.open(GREEK)
            line = GREEK.split("\r\n")[3]
            column = sum(width(c, encoding) for c in line[: line.index("θ̇₁^2")])
            hover = document.hover(3, column)
            found.append(hover["contents"]["value"])
            assert hover["range"]["start"] == {"line": 3, "character": column}
            assert hover["range"]["end"]["character"] == column + sum(width(c, encoding) for c in "θ̇₁")
    assert found[0] == found[1] == found[2] and "θ₁" in found[0]


def test_the_clients_first_encoding_is_taken():
    with Session(clients.PLAIN) as s:
        assert s.capabilities["positionEncoding"] == "utf-32"
    with Session(clients.BARE) as s:
        assert "positionEncoding" not in s.capabilities


def test_places_past_the_end_are_clamped():
    with Session() as s:
        document = s.open(GREEK)
        for line, character in ((0, 10_000), (99, 0), (2**31 - 1, 2**31 - 1), (3, 2**31 - 1)):
            document.hover(line, character)
            document.complete(line, character)
        document.hints(0, 2**31 - 1)
        place = {"textDocument": {"uri": document.uri}}
        backwards = span(3, 0, 0, 0)
        s.ask("textDocument/inlayHint", {**place, "range": backwards})
        s.ask("textDocument/codeAction", {**place, "range": backwards, "context": {"diagnostics": []}})
        s.ask("textDocument/semanticTokens/range", {**place, "range": backwards})


def test_strange_addresses():
    with Session() as s:
        for uri in ("untitled:Untitled-1", "file:///a%20b/%CE%B8/%F0%9D%91%A5.least", "http://observatory.example/swing.least", "file:///C%3A/x.least"):
            document = s.open("coordinate x\nkinetic 1/2 m x'^2\n", uri)
            assert [d["code"] for d in document.diagnostics()] == ["undeclared-name"]
            assert document.hover(0, 11)


def test_opened_twice_and_versions_that_go_back():
    with Session() as s:
        document = s.open("coordinate x\nkinetic x'^2\n")
        s.open("coordinate x\nkinetic x'^2 + y x^2\n", version=7)
        assert [d["code"] for d in document.diagnostics()] == ["undeclared-name"]
        document.change({"text": "coordinate x\nkinetic x'^2\n"}, version=3)
        assert document.diagnostics() == []


LETTERS = ["x", "θ", "̇", "𝑥", "\r\n", "\n", "\r", "'", "^2", " ", "(", ")", "m ", "# ", "coordinate ", "kinetic ", "1/2 ", "+"]


def everything(document):
    """All that the server says of a document."""
    s = document.session
    return {
        "diagnostics": document.diagnostics(),
        "symbols": document.symbols(),
        "tokens": document.tokens()["data"],
        "hints": document.hints(),
        "format": document.format(),
        "hovers": [document.hover(line, 12) for line in range(6)],
        "complete": document.complete(3, 14),
    }


def random_edits(encoding, seed, rounds=12):
    """A text edited at random: after every burst all is as a new server says."""
    letters = random.Random(seed)
    text = GREEK
    with Session(spoken(encoding)) as lived, Session(spoken(encoding)) as fresh:
        document = lived.open(text, "untitled:lived")
        for k in range(rounds):
            for _ in range(letters.randrange(1, 6)):
                lines = text.split("\n")
                place = lambda: {"line": letters.randrange(len(lines) + 1), "character": letters.randrange(30)}
                a, b = place(), place()
                if letters.random() < 0.8:
                    b = dict(a, character=a["character"] + letters.randrange(3))
                a, b = sorted((a, b), key=lambda p: (p["line"], p["character"]))
                change = {"range": {"start": a, "end": b}, "text": "".join(letters.choices(LETTERS, k=letters.randrange(3)))}
                text = edited(text, [{"range": change["range"], "newText": change["text"]}], encoding)
                document.change(change)
            if letters.random() < 0.2:
                text = GREEK
                document.replace(text)
            other = fresh.open(text, f"untitled:fresh{k}", version=document.version)
            here, there = everything(document), everything(other)
            # While the text is broken the last good hints stay, which a new server does not have.
            if any(d["severity"] == 1 for d in here["diagnostics"]):
                here.pop("hints"), there.pop("hints")
            for what in here:
                plain = lambda v: repr(v).replace(document.uri, "").replace(other.uri, "")
                assert plain(here[what]) == plain(there[what]), f"{what} after round {k} of\n{text!r}\n{here[what]}\n{there[what]}"


def test_random_edits_in_utf_16():
    random_edits("utf-16", 1)


def test_random_edits_in_utf_8():
    random_edits("utf-8", 2)


def test_random_edits_in_utf_32():
    random_edits("utf-32", 3)


def test_every_end_of_a_line():
    lines = ["coordinate x: length", "parameter m = 2 kg", "kinetic T = 1/2 m x'^2", "potential V = m q"]
    found = []
    for ends in (("\n",) * 4, ("\r\n",) * 4, ("\r",) * 4, ("\r", "\r\n", "\n", "")):
        with Session() as s:
            document = s.open("".join(a + b for a, b in zip(lines, ends)))
            found.append(([d["range"] for d in document.diagnostics()], document.hover(2, 18), document.tokens()["data"]))
    assert found[0][0] and all(f == found[0] for f in found), found


def test_an_edit_between_the_two_signs_of_a_line_end():
    with Session() as s:
        document = s.open("coordinate x\r\nkinetic x'^2\r\n")
        # The end of a line is before both: a place behind it does not exist.
        document.edit(0, 13, 13, ", y")
        assert [row["name"] for row in document.symbols()][:2] == ["x", "y"]


def test_a_place_inside_of_a_pair_is_before_it():
    with Session() as s:
        document = s.open("coordinate 𝑥\nkinetic 𝑥̇^2\n")
        document.edit(0, 12, 12, "a")
        assert [row["name"] for row in document.symbols()][0] == "a𝑥"
