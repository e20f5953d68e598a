//! What the target must print, from this machine.

fn main() {
    replay::all(&mut |line| println!("{line}"));
}
