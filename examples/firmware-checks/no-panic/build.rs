//! Links the images by the rig's script.

fn main() {
    println!("cargo:rustc-link-arg-bins=-Timage.x");
}
