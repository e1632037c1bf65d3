"""Diagnostics: pushed with their versions or pulled, never old ones, never both."""

import pathlib
import tempfile

import clients
from session import Session, edited

GOOD = "coordinate x\nparameter m\nkinetic T = 1/2 m x'^2\n"
BAD = "coordinate x\nkinetic T = 1/2 m x'^2\n"


def codes(list_):
    return [d["code"] for d in list_]


def test_every_version_is_told_even_where_nothing_changed():
    with Session() as s:
        document = s.open(GOOD)
        assert document.diagnostics() == []
        for k in range(5):
            document.edit(0, 12, 12, "#")
            assert document.diagnostics() == []
        assert [v for v, _ in s.published[document.uri]] == [1, 2, 3, 4, 5, 6]


def test_closing_takes_them_away():
    with Session() as s:
        document = s.open(BAD)
        assert codes(document.diagnostics()) == ["undeclared-name"]
        document.close()
        s.until(lambda: s.published[document.uri][-1][1] == [])
        again = s.open(GOOD)
        assert again.diagnostics() == []


def test_a_client_that_pulls():
    with Session(clients.FULL) as s:
        document = s.open(BAD)
        report = document.pull()
        assert report["kind"] == "full" and codes(report["items"]) == ["undeclared-name"]
        assert document.pull(report["resultId"])["kind"] == "unchanged"
        document.replace(GOOD)
        later = document.pull(report["resultId"])
        assert later["kind"] == "full" and later["items"] == []
        assert not s.published


def test_a_mend_takes_its_finding_away():
    slips = [
        BAD,
        "coordinate x: lenght\nkinetic T = x'^2\n",
        "coordinate θ\nkinetic T = θ'^2 sin 2θ\n",
        "coordinate x, y\nlet P = (x, y)\nkinetic T = P' P'\n",
        "coordinate θ\nkinetic T = θ'^2 + θ(t)\n",
        "coordinate x\nparameter k\nkinetic T = x'^2\n",
        "coordinate x\nparametr m\nkinetic T = m x'^2\n",
    ]
    with Session() as s:
        for k, text in enumerate(slips):
            document = s.open(text, f"file:///observatory/slip{k}.least")
            found = document.diagnostics()
            assert found, text
            actions = document.actions(found[0])
            assert actions, f"no mend for {found[0]}"
            for action in actions:
                assert action["kind"] == "quickfix" and action["diagnostics"]
                change = action["edit"]["documentChanges"][0]
                assert change["textDocument"] == {"uri": document.uri, "version": 1}
            after = edited(text, actions[0]["edit"]["documentChanges"][0]["edits"])
            document.replace(after)
            assert found[0]["code"] not in codes(document.diagnostics()), f"{actions[0]['title']}: {after}"


def test_settings_by_both_ways():
    few = {"diagnostics": {"max": 1, "readings": False}, "hints": {"momentum": False}}
    text = "coordinate x\nkinetic T = 1/2 m x'^2 + a/b x\n"

    def told(s):
        document = s.open(text)
        s.until(lambda: any(codes(d)[-1:] == ["more-findings"] for _, d in s.published.get(document.uri, [])))
        return document.diagnostics()[0], document.hints()

    with Session(options=few) as s:
        by_options = told(s)
    with Session(settings=few) as s:
        by_pull = told(s)
    assert by_options[1] == by_pull[1]


def test_bad_settings_are_complained_about_and_left_out():
    with Session(options={"hints": {"maxLength": "long"}, "colour": {"red": 1}}) as s:
        assert s.open(GOOD).diagnostics() == []
        complaints = [p["message"] for m, p in s.told if m == "window/logMessage"]
        assert any("hints.maxLength" in c for c in complaints) and any("colour.red" in c for c in complaints)


def test_included_files_as_the_editor_has_them():
    with tempfile.TemporaryDirectory() as folder:
        path = pathlib.Path(folder).resolve()
        (path / "site.least").write_text("parameter g = 9.81 m/s^2\n")
        model = 'include "site.least"\ncoordinate x: length\nparameter m = 1 kg\nkinetic T = 1/2 m x\'^2\npotential V = m g x\n'
        (path / "swing.least").write_text(model)
        with Session() as s:
            document = s.open(model, (path / "swing.least").as_uri())
            assert document.diagnostics() == []
            # The open text comes before the disk.
            site = s.open("parameter gg = 9.81 m/s^2\n", (path / "site.least").as_uri())
            s.until(lambda: codes(s.published[document.uri][-1][1]) == ["undeclared-name"])
            target = s.ask("textDocument/definition", document.at(0, 12))
            assert target[0]["targetUri"] == site.uri
            site.replace("parameter g = 9.81 m/s^2\n")
            s.until(lambda: s.published[document.uri][-1][1] == [])
            site.close()
            # Now the disk counts, and the client tells when it changes.
            (path / "site.least").unlink()
            s.tell("workspace/didChangeWatchedFiles", {"changes": [{"uri": site.uri, "type": 3}]})
            s.until(lambda: "include-file" in codes(s.published[document.uri][-1][1]))


def test_new_settings_are_pulled():
    with Session(settings={"hints": {"momentum": True}}) as s:
        document = s.open(GOOD)
        document.diagnostics()
        before = document.hints()
        s.settings = {"hints": {"momentum": False}}
        asked = len(s.asked)
        s.tell("workspace/didChangeConfiguration", {"settings": None})
        s.until(lambda: any(m == "workspace/inlayHint/refresh" for m, _ in s.asked[asked:]))
        after = document.hints()
        assert len(after) == len(before) - 1, (before, after)


def test_new_settings_are_told_to_a_client_that_is_not_asked():
    with Session(clients.PLAIN) as s:
        document = s.open(GOOD)
        before = document.hints()
        s.tell("workspace/didChangeConfiguration", {"settings": {"leastwise": {"hints": {"momentum": False}}}})
        after = document.hints()
        assert len(after) == len(before) - 1, (before, after)


def test_watchers_are_registered():
    with Session() as s:
        s.open(GOOD).diagnostics()
        s.until(lambda: any(m == "client/registerCapability" for m, _ in s.asked))
        ways = {r["method"] for m, p in s.asked if m == "client/registerCapability" for r in p["registrations"]}
        assert ways == {"workspace/didChangeWatchedFiles", "workspace/didChangeConfiguration"}, ways
