"""What clients say of themselves. Made after what the editors announce; the bare one can nothing."""

BARE = {}

# An editor that pulls diagnostics and can nearly everything.
FULL = {
    "general": {"positionEncodings": ["utf-16"]},
    "workspace": {
        "applyEdit": True,
        "configuration": True,
        "didChangeConfiguration": {"dynamicRegistration": True},
        "didChangeWatchedFiles": {"dynamicRegistration": True},
        "workspaceEdit": {"documentChanges": True},
        "inlayHint": {"refreshSupport": True},
        "semanticTokens": {"refreshSupport": True},
        "diagnostics": {"refreshSupport": True},
    },
    "textDocument": {
        "publishDiagnostics": {"relatedInformation": True, "versionSupport": True, "tagSupport": {"valueSet": [1, 2]}},
        "diagnostic": {"dynamicRegistration": False, "relatedDocumentSupport": False},
        "hover": {"contentFormat": ["markdown", "plaintext"]},
        "completion": {"completionItem": {"documentationFormat": ["markdown", "plaintext"], "snippetSupport": True}},
        "definition": {"linkSupport": True},
        "documentSymbol": {"hierarchicalDocumentSymbolSupport": True},
        "rename": {"prepareSupport": True},
        "codeAction": {
            "codeActionLiteralSupport": {"codeActionKind": {"valueSet": ["quickfix"]}},
            "isPreferredSupport": True,
        },
        "inlayHint": {"resolveSupport": {"properties": ["tooltip"]}},
        "semanticTokens": {
            "requests": {"full": {"delta": True}, "range": True},
            "tokenTypes": [],
            "tokenModifiers": [],
            "formats": ["relative"],
        },
    },
}

# An editor that is told diagnostics, with versions.
PUSHED = {**FULL, "textDocument": {k: v for k, v in FULL["textDocument"].items() if k != "diagnostic"}}

# An editor without Markdown that counts characters.
PLAIN = {
    "general": {"positionEncodings": ["utf-32", "utf-8", "utf-16"]},
    "textDocument": {
        "hover": {"contentFormat": ["plaintext"]},
        "publishDiagnostics": {"relatedInformation": False},
        "codeAction": {"codeActionLiteralSupport": {"codeActionKind": {"valueSet": ["quickfix"]}}},
    },
}
