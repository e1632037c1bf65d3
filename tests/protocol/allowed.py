"""What a server may say to a client, given what that client said of itself. Lists of complaints; none is good."""

KINDS = range(1, 19)  # the kinds of completions and symbols that every client knows


class Allowed:
    """Holds messages of the server against the abilities of one client."""

    def __init__(self, client):
        self.client = client

    def can(self, path):
        place = self.client
        for key in path.split("."):
            place = place.get(key) if isinstance(place, dict) else None
        return place

    def news(self, method, params):
        """Requests and notifications of the server."""
        needs = {
            "workspace/configuration": "workspace.configuration",
            "workspace/inlayHint/refresh": "workspace.inlayHint.refreshSupport",
            "workspace/semanticTokens/refresh": "workspace.semanticTokens.refreshSupport",
            "workspace/diagnostic/refresh": "workspace.diagnostics.refreshSupport",
            "workspace/codeLens/refresh": "workspace.codeLens.refreshSupport",
            "workspace/applyEdit": "workspace.applyEdit",
            "workspace/workspaceFolders": "workspace.workspaceFolders",
            "window/workDoneProgress/create": "window.workDoneProgress",
            "window/showDocument": "window.showDocument.support",
            "$/progress": "window.workDoneProgress",
        }
        if method in needs and not self.can(needs[method]):
            yield f"{method}, which the client cannot"
        if method == "client/registerCapability":
            for r in params["registrations"]:
                if not self.can(r["method"].replace("/", ".") + ".dynamicRegistration"):
                    yield f"{r['method']} registered, which the client cannot"
        if method == "textDocument/publishDiagnostics":
            if self.can("textDocument.diagnostic") is not None:
                yield "diagnostics pushed to a client that pulls"
            if "version" in params and not self.can("textDocument.publishDiagnostics.versionSupport"):
                yield "a version for a client that knows none"
            yield from self.diagnostics(params["diagnostics"])

    def result(self, method, result):
        """Answers to the client."""
        check = {
            "initialize": self.server,
            "textDocument/hover": lambda r: self.markup(r["contents"], "textDocument.hover.contentFormat"),
            "textDocument/completion": self.completions,
            "textDocument/signatureHelp": self.signatures,
            "textDocument/documentSymbol": self.symbols,
            "textDocument/definition": self.links,
            "textDocument/codeAction": self.actions,
            "textDocument/rename": self.edit,
            "textDocument/diagnostic": self.report,
            "textDocument/semanticTokens/full": self.tokens,
        }.get(method)
        return check(result) if check and result is not None else ()

    def server(self, result):
        can = result["capabilities"]
        encodings = self.can("general.positionEncodings") or ["utf-16"]
        if can.get("positionEncoding", "utf-16") not in encodings:
            yield f"{can['positionEncoding']}, which the client cannot count in"
        if isinstance(can.get("renameProvider"), dict) and not self.can("textDocument.rename.prepareSupport"):
            yield "options of renaming for a client that cannot prepare"
        if isinstance(can.get("codeActionProvider"), dict) and not self.can("textDocument.codeAction.codeActionLiteralSupport"):
            yield "options of code actions for a client that knows commands only"
        if "codeLensProvider" in can and self.can("textDocument.codeLens") is None:
            yield "lenses for a client that shows none"
        if "leastwise.writeFound" in can["executeCommandProvider"]["commands"] and not self.can("workspace.applyEdit"):
            yield "a command that edits for a client that takes no edits"
        if "signatureHelpProvider" in can and self.can("textDocument.signatureHelp") is None:
            yield "functions around the cursor for a client that shows none"
        if "diagnosticProvider" in can and self.can("textDocument.diagnostic") is None:
            yield "diagnostics to be pulled by a client that does not pull"

    def markup(self, contents, path):
        if isinstance(contents, dict) and contents.get("kind", "plaintext") not in (self.can(path) or ["plaintext"]):
            yield f"{contents['kind']}, which the client does not show"

    def diagnostics(self, list_):
        push = self.can("textDocument.publishDiagnostics") or {}
        for d in list_:
            for field, needs in (
                ("relatedInformation", "relatedInformation"),
                ("codeDescription", "codeDescriptionSupport"),
                ("data", "dataSupport"),
            ):
                if field in d and not push.get(needs):
                    yield f"{field} of a diagnostic for a client that knows none"
            if not set(d.get("tags", [])) <= set(push.get("tagSupport", {}).get("valueSet", [])):
                yield "tags of a diagnostic that the client does not know"

    def report(self, result):
        if "relatedDocuments" in result and not self.can("textDocument.diagnostic.relatedDocumentSupport"):
            yield "related documents for a client that knows none"
        yield from self.diagnostics(result.get("items", []))

    def completions(self, result):
        item = self.can("textDocument.completion.completionItem") or {}
        kinds = (self.can("textDocument.completion.completionItemKind") or {}).get("valueSet", KINDS)
        if isinstance(result, dict) and not set(result.get("itemDefaults", {})) <= set(self.can("textDocument.completion.completionList.itemDefaults") or []):
            yield "defaults of completions that the client does not know"
        for c in result["items"] if isinstance(result, dict) else result:
            if c.get("kind", 1) not in kinds:
                yield f"a completion of kind {c['kind']}, which the client does not know"
            if c.get("insertTextFormat") == 2 and not item.get("snippetSupport"):
                yield "a snippet for a client that knows none"
            if "insert" in c.get("textEdit", {}) and not item.get("insertReplaceSupport"):
                yield "insert and replace for a client that knows one of them"
            for field, needs in (
                ("labelDetails", "labelDetailsSupport"),
                ("commitCharacters", "commitCharactersSupport"),
                ("preselect", "preselectSupport"),
                ("tags", "tagSupport"),
                ("deprecated", "deprecatedSupport"),
                ("insertTextMode", "insertTextModeSupport"),
            ):
                if field in c and not item.get(needs):
                    yield f"{field} of a completion for a client that knows none"
            yield from self.markup(c.get("documentation"), "textDocument.completion.completionItem.documentationFormat")

    def signatures(self, result):
        can = self.can("textDocument.signatureHelp.signatureInformation") or {}
        for one in result["signatures"]:
            yield from self.markup(one.get("documentation"), "textDocument.signatureHelp.signatureInformation.documentationFormat")
            if "activeParameter" in one and not can.get("activeParameterSupport"):
                yield "the argument of one function for a client that knows one of all"
            for p in one.get("parameters", []):
                if isinstance(p["label"], list) and not can.get("parameterInformation", {}).get("labelOffsetSupport"):
                    yield "places of arguments for a client that knows their text only"
                if isinstance(p["label"], str) and p["label"] not in one["label"]:
                    yield "an argument that is not in its label"

    def symbols(self, result):
        kinds = (self.can("textDocument.documentSymbol.symbolKind") or {}).get("valueSet", KINDS)
        for row in result:
            if row["kind"] not in kinds:
                yield f"a symbol of kind {row['kind']}, which the client does not know"
            if "selectionRange" in row and not self.can("textDocument.documentSymbol.hierarchicalDocumentSymbolSupport"):
                yield "a tree of symbols for a client that shows lists"
            yield from self.symbols(row.get("children", []))

    def links(self, result):
        if isinstance(result, list) and any("targetUri" in p for p in result) and not self.can("textDocument.definition.linkSupport"):
            yield "links for a client that knows places only"

    def edit(self, edit):
        if "documentChanges" in edit and not self.can("workspace.workspaceEdit.documentChanges"):
            yield "edits of versions for a client that knows none"
        if "changeAnnotations" in edit and not self.can("workspace.workspaceEdit.changeAnnotationSupport"):
            yield "annotated edits for a client that knows none"

    def actions(self, result):
        can = self.can("textDocument.codeAction") or {}
        for action in result:
            literal = not isinstance(action.get("command"), str)
            if literal and not can.get("codeActionLiteralSupport"):
                yield "a code action for a client that knows commands only"
            for field, needs in (("isPreferred", "isPreferredSupport"), ("data", "dataSupport"), ("disabled", "disabledSupport")):
                if field in action and not can.get(needs):
                    yield f"{field} of a code action for a client that knows none"
            yield from self.edit(action.get("edit", {}))
            yield from self.diagnostics(action.get("diagnostics", []))

    def tokens(self, result):
        overlap = self.can("textDocument.semanticTokens.overlappingTokenSupport")
        end = 0
        for k in range(0, len(result["data"]), 5):
            line, column, length, _, _ = result["data"][k : k + 5]
            if line == 0 and column < end and not overlap:
                yield "tokens that overlap"
            end = length
