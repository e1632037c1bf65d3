//! Semantic tokens: the legend, the numbers, and what has changed since the last ones.

use super::positions::Positions;
use super::worker::View;
use leastwise_analysis::features::tokens::{Token, TokenKind, tokens};
use std::ops::Range;
use tower_lsp::jsonrpc::Result;
use tower_lsp::ls_types as lsp;

/// The types, by their numbers. Standard ones only, so that every theme has colours for them.
const TYPES: [lsp::SemanticTokenType; 15] = [
    lsp::SemanticTokenType::KEYWORD,
    lsp::SemanticTokenType::VARIABLE,
    lsp::SemanticTokenType::PARAMETER,
    lsp::SemanticTokenType::PROPERTY,
    lsp::SemanticTokenType::FUNCTION,
    lsp::SemanticTokenType::EVENT,
    lsp::SemanticTokenType::ENUM_MEMBER,
    lsp::SemanticTokenType::TYPE,
    lsp::SemanticTokenType::NAMESPACE,
    lsp::SemanticTokenType::CLASS,
    lsp::SemanticTokenType::DECORATOR,
    lsp::SemanticTokenType::NUMBER,
    lsp::SemanticTokenType::STRING,
    lsp::SemanticTokenType::COMMENT,
    lsp::SemanticTokenType::OPERATOR,
];

/// The modifiers, by their bits.
const MODIFIERS: [lsp::SemanticTokenModifier; 4] = [
    lsp::SemanticTokenModifier::DECLARATION,
    lsp::SemanticTokenModifier::READONLY,
    lsp::SemanticTokenModifier::MODIFICATION,
    lsp::SemanticTokenModifier::DEFAULT_LIBRARY,
];

fn number(kind: TokenKind) -> u32 {
    match kind {
        TokenKind::Keyword => 0,
        TokenKind::Coordinate => 1,
        TokenKind::Parameter => 2,
        TokenKind::Definition => 3,
        TokenKind::Function => 4,
        TokenKind::Input => 5,
        TokenKind::Index => 6,
        TokenKind::Unit => 7,
        TokenKind::System => 8,
        TokenKind::Term => 9,
        TokenKind::Claim => 10,
        TokenKind::Number => 11,
        TokenKind::Text => 12,
        TokenKind::Comment => 13,
        TokenKind::Operator => 14,
    }
}

/// What the numbers mean.
pub fn legend() -> lsp::SemanticTokensLegend {
    lsp::SemanticTokensLegend { token_types: TYPES.to_vec(), token_modifiers: MODIFIERS.to_vec() }
}

/// The numbers of tokens, each relative to the one before.
fn encoded(list: &[Token], positions: &Positions) -> Vec<lsp::SemanticToken> {
    let mut last = lsp::Position::default();
    // Where the last token begins: the next one of its line is counted from there, so that long lines cost no more.
    let mut offset = 0;
    let mut out = Vec::with_capacity(list.len());
    for token in list {
        let line = positions.line_of(token.range.start) as u32;
        let delta_line = line - last.line;
        let character = if delta_line == 0 {
            last.character + positions.width(offset..token.range.start)
        } else {
            positions.position(token.range.start).character
        };
        let m = token.modifiers;
        let bits = [m.declaration, m.readonly, m.derivative, m.built_in];
        out.push(lsp::SemanticToken {
            delta_line,
            delta_start: if delta_line == 0 { character - last.character } else { character },
            length: positions.width(token.range.clone()),
            token_type: number(token.kind),
            token_modifiers_bitset: bits.iter().enumerate().map(|(k, on)| u32::from(*on) << k).sum(),
        });
        (last, offset) = (lsp::Position { line, character }, token.range.start);
    }
    out
}

fn flat(list: &[lsp::SemanticToken]) -> Vec<u32> {
    list.iter().flat_map(|t| [t.delta_line, t.delta_start, t.length, t.token_type, t.token_modifiers_bitset]).collect()
}

/// The number of these tokens, they, and the ones before with their number.
#[allow(clippy::type_complexity)]
fn all(view: &mut View<'_>) -> (String, Vec<lsp::SemanticToken>, Option<(u64, Vec<u32>)>) {
    let data = encoded(&tokens(view.checked), view.positions);
    let before = view.kept.tokens.take();
    let id = before.as_ref().map_or(1, |(id, _)| id + 1);
    view.kept.tokens = Some((id, flat(&data)));
    (id.to_string(), data, before)
}

/// All tokens.
pub fn full(view: &mut View<'_>) -> Result<Option<lsp::SemanticTokensResult>> {
    let (id, data, _) = all(view);
    Ok(Some(lsp::SemanticTokensResult::Tokens(lsp::SemanticTokens { result_id: Some(id), data })))
}

/// What has changed since the tokens of this number; all where those are gone.
pub fn delta(view: &mut View<'_>, previous: &str) -> Result<Option<lsp::SemanticTokensFullDeltaResult>> {
    let (id, data, before) = all(view);
    let known = before.filter(|(id, _)| id.to_string() == previous);
    let Some((_, old)) = known else {
        let tokens = lsp::SemanticTokens { result_id: Some(id), data };
        return Ok(Some(lsp::SemanticTokensFullDeltaResult::Tokens(tokens)));
    };
    let edits = changed(&old, &data);
    let delta = lsp::SemanticTokensDelta { result_id: Some(id), edits };
    Ok(Some(lsp::SemanticTokensFullDeltaResult::TokensDelta(delta)))
}

/// One edit from the first token that differs to the last.
fn changed(old: &[u32], new: &[lsp::SemanticToken]) -> Vec<lsp::SemanticTokensEdit> {
    const WIDTH: usize = 5;
    let flat = flat(new);
    let (a, b) = (old.as_chunks::<WIDTH>().0, flat.as_chunks::<WIDTH>().0);
    let front = a.iter().zip(b).take_while(|(x, y)| x == y).count();
    let back = a[front..].iter().rev().zip(b[front..].iter().rev()).take_while(|(x, y)| x == y).count();
    let (removed, added) = (a.len() - front - back, &new[front..b.len() - back]);
    if removed == 0 && added.is_empty() {
        return Vec::new();
    }
    vec![lsp::SemanticTokensEdit {
        start: (front * WIDTH) as u32,
        delete_count: (removed * WIDTH) as u32,
        data: (!added.is_empty()).then(|| added.to_vec()),
    }]
}

/// The tokens of a part of the text.
pub fn range(view: &mut View<'_>, range: lsp::Range) -> Result<Option<lsp::SemanticTokensRangeResult>> {
    let wanted: Range<usize> = view.positions.bytes(range);
    let list: Vec<Token> =
        tokens(view.checked).into_iter().filter(|t| t.range.start < wanted.end && wanted.start < t.range.end).collect();
    let data = encoded(&list, view.positions);
    Ok(Some(lsp::SemanticTokensRangeResult::Tokens(lsp::SemanticTokens { result_id: None, data })))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn token(length: u32) -> lsp::SemanticToken {
        lsp::SemanticToken { delta_line: 0, delta_start: 1, length, token_type: 0, token_modifiers_bitset: 0 }
    }

    #[test]
    fn a_delta_turns_the_old_tokens_into_the_new_ones() {
        for (old, new) in [("1234", "1274"), ("12", "1232"), ("11", "111"), ("123", ""), ("", "12"), ("12", "12")] {
            let list = |text: &str| -> Vec<_> { text.bytes().map(|b| token(u32::from(b))).collect() };
            let mut data = flat(&list(old));
            let edits = changed(&data, &list(new));
            assert!(edits.len() <= 1);
            for e in edits {
                let at = e.start as usize;
                data.splice(at..at + e.delete_count as usize, flat(&e.data.unwrap_or_default()));
            }
            assert_eq!(data, flat(&list(new)), "{old} to {new}");
        }
    }

    #[test]
    fn there_is_a_name_for_every_number() {
        assert_eq!(number(TokenKind::Operator) as usize + 1, TYPES.len());
        assert_eq!(TYPES[number(TokenKind::Comment) as usize], lsp::SemanticTokenType::COMMENT);
    }
}
