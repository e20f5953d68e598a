use super::error::Faults;
use super::{Channel, ReadOptions, Recording};
use std::io::Read;
pub(super) fn read<R: Read>(
    _: R,
    _: &[u8],
    _: &[&str],
    _: &ReadOptions,
    faults: &mut Faults,
) -> Vec<Recording> {
    faults.whole_file("is no VCD");
    faults.help("export as VCD");
    Vec::new()
}
pub(super) fn channels<R: Read>(_: R, _: &[u8], _: &ReadOptions, faults: &mut Faults) -> Vec<Channel> {
    faults.whole_file("is no VCD");
    Vec::new()
}
