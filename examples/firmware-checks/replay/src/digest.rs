//! One number for all that a machine did: [`Digest`].

use core::hash::Hasher;

/// FNV-1a with 64 bits (Fowler, Noll and Vo; the constants are those of RFC 9923), the same on every machine.
pub(crate) struct Digest(u64);

impl Digest {
    pub(crate) const fn new() -> Self {
        Self(0xcbf2_9ce4_8422_2325)
    }
}

impl Hasher for Digest {
    fn finish(&self) -> u64 {
        self.0
    }

    fn write(&mut self, bytes: &[u8]) {
        for &byte in bytes {
            self.0 = (self.0 ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3);
        }
    }

    fn write_u8(&mut self, byte: u8) {
        self.write(&[byte]);
    }

    fn write_u16(&mut self, number: u16) {
        self.write(&number.to_le_bytes());
    }

    fn write_u32(&mut self, number: u32) {
        self.write(&number.to_le_bytes());
    }

    fn write_u64(&mut self, number: u64) {
        self.write(&number.to_le_bytes());
    }

    // Lengths of arrays and numbers of variants: as wide as the machine, and here never above 255.

    fn write_usize(&mut self, number: usize) {
        self.write(&[number as u8]);
    }

    fn write_isize(&mut self, number: isize) {
        self.write(&[number as u8]);
    }
}
