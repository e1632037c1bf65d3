"""Searches for constants of the motion that nobody claimed: when they run, who is told, what is shown of them."""

import time

import clients
from session import Refused, Session, edited, span

PLANE = """system plane
coordinate x, y: length
parameter m: mass
kinetic T = 1/2 m (x'^2 + y'^2)
"""
NAMES = {"rotation_xy", "boost_x", "boost_y", "dilation", "expansion"}
LAST = 3  # the line of the last term



class Held(Session):
    """A conversation in which searches take as long as the test likes."""

    def __init__(self, **more):
        super().__init__(environment={"LEASTWISE_TEST_REQUESTS": "1"}, **more)
        self.hold(True)

    def hold(self, on):
        self.ask("leastwise/testHold", [on])


def searched(session, times=1):
    """Waits until so many searches have found something out."""
    session.until(lambda: sum(method == "workspace/codeLens/refresh" for method, _ in session.asked) >= times)


def told(session, kind, times=1):
    """Waits for progress of a kind."""
    values = lambda: [p["value"] for method, p in session.told if method == "$/progress" and p["value"]["kind"] == kind]
    session.until(lambda: len(values()) >= times)
    return values()[-1]


def found(document):
    """The names in the hint; nothing where there is none."""
    labels = [h["label"] for h in document.hints() if " more: " in h["label"]]
    assert len(labels) <= 1, labels
    if not labels:
        return set()
    count, names = labels[0].split(" more: ")
    names = names.split(", ")
    assert names[-1].endswith("…") or len(names) == int(count), labels
    return set(names)


def test_what_is_found_is_shown_and_written():
    with Session(options={"hints": {"maxLength": 400}}) as s:
        document = s.open(PLANE)
        searched(s)
        assert found(document) == NAMES
        (lens,) = document.lenses()
        assert lens["command"]["title"].startswith("5 more constants of the motion"), lens
        assert lens["range"] == span(0, 7, 0, 12)
        all_, *each = document.rewrites(LAST)
        assert len(each) == 5 and all(a["kind"] == "refactor.rewrite" for a in each)
        assert document.rewrites(1) == [], "actions where nothing is to be written"
        one = next(a for a in each if "`rotation_xy`" in a["title"])
        assert one["title"].endswith("angular momentum about z"), one
        (edit,) = one["edit"]["documentChanges"]
        assert "\n\nsymmetry rotation_xy: (x, y) -> (" in edited(PLANE, edit["edits"])
        # All of it, and the claims are proved.
        (edit,) = all_["edit"]["documentChanges"]
        written = edited(PLANE, edit["edits"])
        document.replace(written)
        assert document.diagnostics() == []
        verdicts = [h["label"] for h in document.hints() if h["position"]["line"] > LAST]
        assert len(verdicts) == 5 and not any("broken" in v or "undecided" in v for v in verdicts), verdicts
        searched(s, 2)
        assert found(document) == set() and document.lenses() == []


def test_the_lens_writes_by_its_command():
    with Session() as s:
        document = s.open(PLANE)
        searched(s)
        (lens,) = document.lenses()
        assert lens["command"]["command"] in s.capabilities["executeCommandProvider"]["commands"]
        command = {k: lens["command"][k] for k in ("command", "arguments")}
        assert s.ask("workspace/executeCommand", command) is None
        edits = lambda: [p["edit"] for method, p in s.asked if method == "workspace/applyEdit"]
        s.until(edits)
        (change,) = edits()[0]["documentChanges"]
        assert change["textDocument"]["version"] == 1
        assert edited(PLANE, change["edits"]).count("symmetry ") == 5


def test_the_sheet_tells_of_it():
    with Session() as s:
        document = s.open(PLANE)
        searched(s)
        sheet = s.ask("workspace/executeCommand", {"command": "leastwise.sheet", "arguments": [document.uri]})
        assert "Also conserved" in sheet and "None other in this ansatz" in sheet, sheet


def test_nothing_is_shown_of_an_older_text():
    with Session() as s:
        document = s.open(PLANE)
        searched(s)
        assert found(document) and "rotation_xy = m (x ẏ - y ẋ)" in document.hover(0, 8)["contents"]["value"]
        document.edit(LAST, 0, 0, "# a remark\n")
        assert found(document) == set() and document.lenses() == [] and document.rewrites(LAST + 1) == []
        assert "rotation_xy" not in document.hover(0, 8)["contents"]["value"]
        try:
            s.ask("workspace/executeCommand", {"command": "leastwise.writeFound", "arguments": [document.uri]})
        except Refused as error:
            assert error.code == -32803 and error.message
        else:
            raise AssertionError("written into another text")
        searched(s, 2)
        assert found(document)


def test_progress_is_told_and_a_change_ends_it():
    with Held() as s:
        document = s.open(PLANE)
        begin = told(s, "begin")
        assert begin["cancellable"] and "swing.least" in begin["title"] and begin["message"], begin
        for k in range(3):
            for _ in range(10):
                document.edit(3, 0, 0, "#\n")
            told(s, "end", k + 1)
            told(s, "begin", k + 2)
        assert found(document) == set()
        s.hold(False)
        assert told(s, "end", 4)["message"] == "5 more constants of the motion"
        assert found(document)


def test_a_burst_of_edits_begins_nothing():
    with Session() as s:
        document = s.open(PLANE)
        for k in range(200):
            document.edit(LAST, 0, 0, f"# {k}\n")
        searched(s)
        assert found(document)
        assert sum(method == "workspace/codeLens/refresh" for method, _ in s.asked) == 1


def test_a_search_is_cancelled_by_hand():
    with Held() as s:
        document = s.open(PLANE)
        told(s, "begin")
        (token,) = s.progress
        s.tell("window/workDoneProgress/cancel", {"token": "leastwise/nothing"})
        s.tell("window/workDoneProgress/cancel", {"token": token})
        told(s, "end")
        assert found(document) == set() and list(s.progress) == [token]


def test_the_end_and_closing_end_a_search():
    with Held() as s:
        s.open(PLANE, "untitled:one").close()
        document = s.open(PLANE)
        told(s, "begin")
        document.close()
        told(s, "end")
        s.open(PLANE)
        told(s, "begin", 2)


def test_a_client_that_refuses_progress():
    with Held() as s:
        s.refuses.add("window/workDoneProgress/create")
        document = s.open(PLANE)
        s.until(lambda: s.progress)
        s.hold(False)
        searched(s)
        assert found(document) and set(s.progress.values()) == {"refused"}


def test_clients_that_know_neither_progress_nor_lenses():
    for client in (clients.PLAIN, clients.EGLOT):
        with Session(client, settings={}) as s:
            document = s.open(PLANE)
            assert "codeLensProvider" not in s.capabilities
            for _ in range(200):
                if found(document):
                    break
                time.sleep(0.05)
            assert document.rewrites(LAST)


def test_settings_of_searches():
    with Session(options={"hints": {"search": False}}) as s:
        document = s.open(PLANE)
        searched(s)
        assert found(document) == set() and document.lenses()
        # Others come with the next settings, which are a reason to search anew.
        change = {"settings": {"leastwise": {"search": {"degree": 0}}}}
        s.settings = change["settings"]["leastwise"]
        s.tell("workspace/didChangeConfiguration", change)
        searched(s, 2)
        assert found(document) < NAMES
    with Session(options={"search": {"run": False}}) as s:
        document = s.open(PLANE)
        document.diagnostics()
        time.sleep(1)
        s.drain()
        assert document.lenses() == [] and not any(method.endswith("codeLens/refresh") for method, _ in s.asked)


def test_a_model_with_an_error_is_not_searched():
    with Session() as s:
        broken = s.open(PLANE + "potential V = b x\n", "untitled:broken")
        assert broken.diagnostics()
        document = s.open(PLANE)
        searched(s)
        assert found(document) and broken.lenses() == []
