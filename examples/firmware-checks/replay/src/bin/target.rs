//! The same on the emulated part.
#![cfg_attr(target_os = "none", no_std, no_main)]

#[cfg(target_os = "none")]
rig::image!(main);

fn main() {
    #[cfg(target_os = "none")]
    replay::all(&mut |line| rig::say!("{line}"));
    #[cfg(not(target_os = "none"))]
    panic!("built for the host; run replay-host there");
}
