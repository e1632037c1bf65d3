"""What clients say of themselves. Made after what the editors announce; the bare one can nothing."""

BARE = {}

# An editor that pulls diagnostics and can nearly everything.
FULL = {
    "general": {"positionEncodings": ["utf-16"]},
    "window": {"workDoneProgress": True},
    "workspace": {
        "applyEdit": True,
        "configuration": True,
        "didChangeConfiguration": {"dynamicRegistration": True},
        "didChangeWatchedFiles": {"dynamicRegistration": True},
        "workspaceEdit": {"documentChanges": True},
        "inlayHint": {"refreshSupport": True},
        "codeLens": {"refreshSupport": True},
        "semanticTokens": {"refreshSupport": True},
        "diagnostics": {"refreshSupport": True},
    },
    "textDocument": {
        "publishDiagnostics": {"relatedInformation": True, "versionSupport": True, "tagSupport": {"valueSet": [1, 2]}},
        "diagnostic": {"dynamicRegistration": False, "relatedDocumentSupport": False},
        "hover": {"contentFormat": ["markdown", "plaintext"]},
        "completion": {"completionItem": {"documentationFormat": ["markdown", "plaintext"], "snippetSupport": True}},
        "signatureHelp": {
            "signatureInformation": {
                "documentationFormat": ["markdown", "plaintext"],
                "parameterInformation": {"labelOffsetSupport": True},
                "activeParameterSupport": True,
            },
            "contextSupport": True,
        },
        "definition": {"linkSupport": True},
        "documentSymbol": {"hierarchicalDocumentSymbolSupport": True},
        "rename": {"prepareSupport": True},
        "codeAction": {
            "codeActionLiteralSupport": {"codeActionKind": {"valueSet": ["quickfix"]}},
            "isPreferredSupport": True,
        },
        "codeLens": {"dynamicRegistration": False},
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

KINDS = list(range(1, 26))

# After what Visual Studio Code announces: it pulls, knows every kind, and can be asked and registered with.
VSCODE = {
    **FULL,
    "window": {"workDoneProgress": True, "showMessage": {"messageActionItem": {"additionalPropertiesSupport": True}}},
    "textDocument": {
        **FULL["textDocument"],
        "completion": {
            "completionItem": {
                "documentationFormat": ["markdown", "plaintext"],
                "snippetSupport": True,
                "insertReplaceSupport": True,
                "labelDetailsSupport": True,
                "commitCharactersSupport": True,
                "preselectSupport": True,
            },
            "completionItemKind": {"valueSet": KINDS},
        },
        "documentSymbol": {"hierarchicalDocumentSymbolSupport": True, "symbolKind": {"valueSet": [*KINDS, 26]}},
    },
}

# After what Neovim 0.11 announces: it pulls, counts bytes first, and takes no versions of edits.
NEOVIM = {
    "general": {"positionEncodings": ["utf-8", "utf-16", "utf-32"]},
    "window": {"workDoneProgress": True, "showDocument": {"support": True}},
    "workspace": {
        "applyEdit": True,
        "configuration": True,
        "didChangeConfiguration": {"dynamicRegistration": False},
        "didChangeWatchedFiles": {"dynamicRegistration": False},
        "workspaceEdit": {"resourceOperations": ["rename", "create", "delete"]},
        "inlayHint": {"refreshSupport": True},
        "semanticTokens": {"refreshSupport": True},
    },
    "textDocument": {
        "publishDiagnostics": {"relatedInformation": True, "tagSupport": {"valueSet": [1, 2]}, "dataSupport": True},
        "diagnostic": {"dynamicRegistration": False},
        "hover": {"contentFormat": ["markdown", "plaintext"]},
        "completion": {
            "completionItem": {"documentationFormat": ["markdown", "plaintext"], "snippetSupport": True},
            "completionItemKind": {"valueSet": KINDS},
        },
        "signatureHelp": {
            "signatureInformation": {
                "documentationFormat": ["markdown", "plaintext"],
                "parameterInformation": {"labelOffsetSupport": True},
                "activeParameterSupport": True,
            },
            "contextSupport": True,
        },
        "definition": {"linkSupport": True},
        "documentSymbol": {"hierarchicalDocumentSymbolSupport": True, "symbolKind": {"valueSet": [*KINDS, 26]}},
        "rename": {"prepareSupport": True},
        "codeAction": {
            "codeActionLiteralSupport": {"codeActionKind": {"valueSet": ["", "quickfix"]}},
            "isPreferredSupport": True,
            "dataSupport": True,
        },
        "codeLens": {"dynamicRegistration": False},
        "inlayHint": {"resolveSupport": {"properties": ["textEdits", "tooltip", "location", "command"]}},
        "semanticTokens": {
            "requests": {"full": {"delta": True}, "range": False},
            "tokenTypes": [],
            "tokenModifiers": [],
            "formats": ["relative"],
        },
    },
}

# After what Emacs' eglot announces: it counts characters first, takes no Markdown without a mode for it, cannot prepare.
EGLOT = {
    "general": {"positionEncodings": ["utf-32", "utf-8", "utf-16"]},
    "window": {"workDoneProgress": True},
    "workspace": {
        "applyEdit": True,
        "configuration": True,
        "didChangeWatchedFiles": {"dynamicRegistration": True},
        "workspaceEdit": {"documentChanges": True},
    },
    "textDocument": {
        "publishDiagnostics": {"relatedInformation": False, "codeDescriptionSupport": False, "tagSupport": {"valueSet": [1, 2]}},
        "hover": {"contentFormat": ["plaintext"]},
        "completion": {"completionItem": {"snippetSupport": False, "deprecatedSupport": True, "tagSupport": {"valueSet": [1]}}},
        "signatureHelp": {"signatureInformation": {"parameterInformation": {"labelOffsetSupport": False}}},
        "definition": {"linkSupport": True},
        "documentSymbol": {"hierarchicalDocumentSymbolSupport": True, "symbolKind": {"valueSet": [*KINDS, 26]}},
        "rename": {"dynamicRegistration": False},
        "codeAction": {
            "codeActionLiteralSupport": {"codeActionKind": {"valueSet": ["quickfix"]}},
            "isPreferredSupport": True,
        },
        "inlayHint": {"dynamicRegistration": False},
    },
}

ALL = {"bare": BARE, "plain": PLAIN, "full": FULL, "pushed": PUSHED, "vscode": VSCODE, "neovim": NEOVIM, "eglot": EGLOT}
