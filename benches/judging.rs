//! (to be written)
fn main() {
    divan::main();
}
