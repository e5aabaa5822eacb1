//! Tells cargo that a new or removed knowledge file changes the binary.

fn main() {
    println!("cargo:rerun-if-changed=knowledge");
}
