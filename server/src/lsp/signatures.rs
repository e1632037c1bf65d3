//! The function around the cursor, made from the text alone.

use super::abilities::Abilities;
use super::convert::escaped;
use super::documents::{Document, lock};
use super::positions::Positions;
use leastwise_analysis::features::completion::signature::{Signature, signature};
use std::ops::Range;
use tower_lsp::ls_types as lsp;

/// The innermost call at a position of the newest text.
pub fn answer(document: &Document, abilities: &Abilities, position: lsp::Position) -> Option<lsp::SignatureHelp> {
    let snapshot = document.snapshot();
    if snapshot.text.len() > super::worker::MAX_TEXT {
        return None;
    }
    let included = lock(&document.included).clone();
    let positions = Positions::new(snapshot.text.clone(), abilities.encoding);
    signature(&snapshot.text, positions.offset(position), &included).map(|s| shown(s, abilities))
}

fn shown(found: Signature, abilities: &Abilities) -> lsp::SignatureHelp {
    let documentation = found.documentation.map(|text| {
        lsp::Documentation::MarkupContent(if abilities.markdown_signature {
            lsp::MarkupContent { kind: lsp::MarkupKind::Markdown, value: escaped(&text) }
        } else {
            lsp::MarkupContent { kind: lsp::MarkupKind::PlainText, value: text }
        })
    });
    let parameter = |range: &Range<usize>| lsp::ParameterInformation {
        label: if abilities.label_offsets {
            lsp::ParameterLabel::LabelOffsets([units(&found.label, range.start), units(&found.label, range.end)])
        } else {
            lsp::ParameterLabel::Simple(found.label[range.clone()].to_string())
        },
        documentation: None,
    };
    let parameters: Vec<_> = found.arguments.iter().map(parameter).collect();
    let active = u32::try_from(found.active).ok().filter(|_| !parameters.is_empty());
    let signature = lsp::SignatureInformation {
        parameters: Some(parameters),
        documentation,
        label: found.label,
        active_parameter: None,
    };
    lsp::SignatureHelp { signatures: vec![signature], active_signature: Some(0), active_parameter: active }
}

/// Places in labels are counted in UTF-16, whatever was agreed on for texts.
fn units(label: &str, offset: usize) -> u32 {
    label[..offset].encode_utf16().count() as u32
}

#[cfg(test)]
mod tests {
    use super::*;

    /// What is shown of `𝑈(θ, φ)` while φ is typed.
    fn check(client: serde_json::Value, expected: serde_json::Value) {
        let client = serde_json::from_value(client).expect("a client");
        let label = "𝑈(θ, φ)".to_string();
        let found = Signature { label, documentation: Some("of a_b".into()), arguments: vec![5..7, 9..11], active: 1 };
        let help = shown(found, &Abilities::of(&client));
        assert_eq!(serde_json::to_value(help).expect("JSON"), expected);
    }

    #[test]
    fn arguments_by_their_places_or_as_they_are() {
        let signature = |documentation: serde_json::Value, a: serde_json::Value, b: serde_json::Value| {
            serde_json::json!({
                "signatures": [{
                    "label": "𝑈(θ, φ)", "documentation": documentation, "parameters": [{ "label": a }, { "label": b }],
                }],
                "activeSignature": 0, "activeParameter": 1,
            })
        };
        check(
            serde_json::json!({ "general": { "positionEncodings": ["utf-8"] }, "textDocument": { "signatureHelp": {
                "signatureInformation": {
                    "documentationFormat": ["markdown"], "parameterInformation": { "labelOffsetSupport": true },
                },
            } } }),
            signature(
                serde_json::json!({ "kind": "markdown", "value": "of a\\_b" }),
                serde_json::json!([3, 4]),
                serde_json::json!([6, 7]),
            ),
        );
        check(
            serde_json::json!({}),
            signature(
                serde_json::json!({ "kind": "plaintext", "value": "of a_b" }),
                serde_json::json!("θ"),
                serde_json::json!("φ"),
            ),
        );
    }
}
