//! Builds the parsers of `grammar/` into `OUT_DIR`, mirroring the folder.

use std::{env, path::PathBuf};

fn main() {
    let root = PathBuf::from(env::var_os("CARGO_MANIFEST_DIR").expect("set by cargo"));
    lalrpop::Configuration::new()
        .set_in_dir(root.join("grammar"))
        .set_out_dir(env::var_os("OUT_DIR").expect("set by cargo"))
        .emit_rerun_directives(true)
        .emit_comments(false)
        .emit_report(false)
        .process()
        .expect("the grammars in grammar/ are accepted");
}
