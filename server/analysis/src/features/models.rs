//! Models for tests of features: the examples, and what a hand makes of them on the way.

/// The example models.
const EXAMPLES: [&str; 11] = [
    include_str!("../../../../grammar/examples/ballistic_gravimeter.least"),
    include_str!("../../../../grammar/examples/buoy_chain.least"),
    include_str!("../../../../grammar/examples/charged_drop.least"),
    include_str!("../../../../grammar/examples/elastic_gravimeter.least"),
    include_str!("../../../../grammar/examples/gimballed_rotor.least"),
    include_str!("../../../../grammar/examples/moving_coil_geophone.least"),
    include_str!("../../../../grammar/examples/sampling_arm.least"),
    include_str!("../../../../grammar/examples/seismometer.least"),
    include_str!("../../../../grammar/examples/shaft_winch.least"),
    include_str!("../../../../grammar/examples/tethered_buoys.least"),
    "index i: 1..3\r\ncoordinate 𝑥[i], θ̂\r\nparameter m[i], k\r\nkinetic a = sum(i: 1/2 m[i] 𝑥̇[i]^2) + θ̂'^2\r\n\
     potential b = sum(i in 1..2: k (𝑥[i+1] - 𝑥[i])^2)\r\nsymmetry s: 𝑥[i] -> 𝑥[i] + ε\r\n",
];

/// Does something with each of the models.
pub(crate) fn with_models(mut f: impl FnMut(&str)) {
    EXAMPLES.iter().for_each(|text| f(text));
}

/// The text, and the text as it is while somebody types in it: cut off, a letter put in, a letter taken out.
pub(crate) fn broken(text: &str) -> Vec<String> {
    let places: Vec<usize> = text.char_indices().map(|c| c.0).collect();
    let mut out = vec![text.to_string()];
    for (k, sign) in ["(", "'", "+", " ", "θ", "\n", "\"", "#"].into_iter().enumerate() {
        let at = places[(k * 7919 + 131) % places.len()];
        out.push(format!("{}{sign}{}", &text[..at], &text[at..]));
        let end = text[at..].chars().next().map_or(at, |c| at + c.len_utf8());
        out.push(format!("{}{}", &text[..at], &text[end..]));
        out.push(text[..at].to_string());
    }
    out
}

/// The next number of a fixed sequence, below `n`.
fn draw(state: &mut u64, n: usize) -> usize {
    *state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
    (*state >> 33) as usize % n.max(1)
}

/// One thing that a hand does: take a line out, put one in twice, change a character, type a letter, change line ends.
pub(crate) fn edited(text: &str, original: &str, state: &mut u64) -> String {
    let places: Vec<usize> = text.char_indices().map(|c| c.0).collect();
    let mut lines: Vec<&str> = text.split_inclusive('\n').collect();
    let Some(&place) = places.get(draw(state, places.len())) else { return original.to_string() };
    let line = draw(state, lines.len());
    let end = place + text[place..].chars().next().map_or(0, char::len_utf8);
    let letter = ["2", "θ", "𝑥", "'", " ", "m", "\u{307}", "(", "\n", "#"][draw(state, 10)];
    match draw(state, 9) {
        0 => drop(lines.remove(line)),
        1 => lines.insert(line, lines[draw(state, lines.len())]),
        2 => return original.to_string(),
        3 => return text.replace('\n', "\r\n"),
        4 => return text.replace("\r\n", "\n"),
        5 => return format!("{}{}", &text[..place], &text[end..]),
        6 => return format!("{}{letter}{}", &text[..place], &text[end..]),
        _ => return format!("{}{letter}{}", &text[..place], &text[place..]),
    }
    lines.concat()
}
