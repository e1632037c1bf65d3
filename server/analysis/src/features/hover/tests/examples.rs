//! The hovers of the example models, to be read as a physicist would.

use super::{SITE, shown};
use crate::database::Session;
use crate::features::place::{Binder, Thing, place_at};
use std::fmt::Write;

/// Every hover of a model but those of words, units and ε: one after the other, each once.
fn all(text: &str) -> String {
    let mut session = Session::new();
    let checked = session.check("folder/model.least", text, &SITE);
    let derived = session.derive(&checked);
    let (mut seen, mut out) = (Vec::new(), String::new());
    for offset in text.char_indices().map(|c| c.0) {
        let common = place_at(&checked, offset).is_some_and(|p| match p.thing {
            Thing::Word(_) | Thing::Unit(_) => true,
            Thing::Bound(b) => b.kind == Binder::Transformation,
            _ => false,
        });
        let Some(hover) = session.hover(&checked, &derived, offset).filter(|_| !common) else { continue };
        if !seen.contains(&hover.blocks) {
            seen.push(hover.blocks.clone());
            writeln!(out, "{}\n", shown(text, Some(hover))).unwrap();
        }
    }
    out
}

macro_rules! examples {
    ($($name:ident)*) => {
        $(
            #[test]
            fn $name() {
                let text = include_str!(concat!("../../../../../../grammar/examples/", stringify!($name), ".least"));
                insta::assert_snapshot!(all(text));
            }
        )*
    };
}

examples! {
    ballistic_gravimeter
    buoy_chain
    charged_drop
    elastic_gravimeter
    gimballed_rotor
    moving_coil_geophone
    sampling_arm
    seismometer
    shaft_winch
    tethered_buoys
}
