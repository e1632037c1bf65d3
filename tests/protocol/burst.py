"""A client in a hurry: order, cancellation, and what is no longer wanted."""

import random

import clients
from session import Refused, Session, edited

TEXT = "coordinate x, y\nparameter m, k\nkinetic T = 1/2 m (x'^2 + y'^2)\npotential V = 1/2 k x^2\nsymmetry s: y -> y + ε\n"


def outcome(session, number):
    try:
        return session.answer(number)
    except Refused as error:
        assert error.code in (-32800, -32801), f"{error.code}: {error.message}"
        return error.code


def test_five_hundred_changes_and_two_hundred_hovers():
    rng = random.Random(7)
    with Session() as s:
        document = s.open(TEXT)
        asked, k = [], 0
        for step in range(700):
            if step % 7 < 5:
                k += 1
                document.edit(3, 14, 17 + len(str(k - 1)) - 1 if k > 1 else 17, f"{k}/2")
            else:
                asked.append(document.session.begin("textDocument/hover", document.at(2, 18)))
                if rng.random() < 0.3:
                    s.cancel(asked[-1])
        answers = [outcome(s, number) for number in asked]
        assert k == 500 and len(answers) == 200
        assert any(isinstance(a, dict) for a in answers), "not one hover was answered"
        # The last text is the one that counts, and versions only grow.
        assert document.diagnostics() == []
        versions = [v for v, _ in s.published[document.uri]]
        assert versions == sorted(versions) and versions[-1] == 501
        hover = document.hover(3, 11)
        assert "500/2" in hover["contents"]["value"] or "250" in hover["contents"]["value"], hover


def test_changes_are_applied_in_the_order_of_arrival():
    with Session() as s:
        document = s.open("")
        text = ""
        for k in range(300):
            letter = "abcθ𝑥\n"[k % 6]
            change = {"range": {"start": {"line": 0, "character": 0}, "end": {"line": 0, "character": 0}}, "text": letter}
            text = edited(text, [{"range": change["range"], "newText": letter}])
            document.change(change)
            if k % 10 == 0:
                s.begin("textDocument/documentSymbol", document.id)
        other = s.open(text, "untitled:other", version=301)
        assert document.tokens()["data"] == other.tokens()["data"]
        s.until(lambda: not s.open_requests)


def test_an_answer_is_for_the_text_that_was_asked_about():
    with Session() as s:
        document = s.open(TEXT)
        number = s.begin("textDocument/inlayHint", {**document.id, "range": {"start": {"line": 0, "character": 0}, "end": {"line": 9, "character": 0}}})
        document.edit(0, 0, 0, "\n")
        answer = outcome(s, number)
        if isinstance(answer, list):
            assert min(h["position"]["line"] for h in answer) == 0


def chain(n):
    return f"""index i: 1..{n}
coordinate θ[i]: angle
parameter m[i], l[i], g
let P[i] = (sum(j in 1..i: l[j] sin θ[j]), -sum(j in 1..i: l[j] cos θ[j]))
kinetic   bobs   = sum(i: 1/2 m[i] |P[i]'|^2)
potential weight = sum(i: m[i] g P[i][2])
symmetry delay: t -> t + ε
"""


def test_a_change_ends_what_is_being_derived():
    # Were each of the changes derived to its end, the last would come long after the first few.
    with Session() as s:
        document = s.open(chain(40))
        for k in range(30):
            document.edit(4, 0, 0, f"# {k}\n")
        document.edit(4, 0, 0, "#\n")
        document.diagnostics()
        told = [v for v, _ in s.published[document.uri]]
        assert told[-1] == 32 and len(told) < 16, told


def test_a_slow_document_does_not_hold_up_another():
    with Session() as s:
        slow = s.open(chain(50), "untitled:slow")
        quick = s.open(TEXT, "untitled:quick")
        number = s.begin("textDocument/hover", slow.at(1, 11))
        assert quick.hover(0, 11)
        assert quick.diagnostics() == []
        outcome(s, number)


def test_cancelled_requests_are_answered_once():
    with Session() as s:
        document = s.open(chain(12))
        numbers = []
        for k in range(60):
            numbers.append(s.begin("textDocument/hover", document.at(1, 11)))
            if k % 2:
                s.cancel(numbers[-1])
        answers = [outcome(s, n) for n in numbers]
        assert sum(isinstance(a, dict) for a in answers) >= 30
        s.cancel(numbers[0])
        s.cancel(999_999)


def test_closing_answers_what_was_asked():
    with Session() as s:
        document = s.open(chain(30))
        numbers = [s.begin("textDocument/hover", document.at(1, 11)) for _ in range(20)]
        document.close()
        for n in numbers:
            try:
                s.answer(n)
            except Refused as error:
                assert error.code in (-32800, -32801), error
