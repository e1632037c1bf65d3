//! Generates the parser from the grammar.

fn main() {
    println!("cargo:rerun-if-changed=src/model.lalrpop");
    lalrpop::Configuration::new()
        .use_cargo_dir_conventions()
        .emit_rerun_directives(true)
        .process()
        .expect("src/model.lalrpop is a grammar without conflicts");
}
