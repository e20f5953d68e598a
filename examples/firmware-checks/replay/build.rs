//! Links the image by the rig's script.

fn main() {
    println!("cargo:rustc-link-arg-bin=replay-target=-Timage.x");
}
