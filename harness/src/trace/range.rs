//! The range of a channel in volts, and whether two thresholds lie inside it.

use super::channel::{Channel, listed};
use super::error::{Faults, Lack};
use super::options::Thresholds;

/// What an instrument writes where it has no reading: 9.9E37 stands for beyond the range, 9.91E37 for not a number
/// (IEEE 488.2 instruments, SCPI 1999 volume 1, 7.2.1.4 and 7.2.1.5; from memory).
pub(super) const BEYOND_RANGE: f64 = 9.9e37;
const NOT_A_NUMBER: f64 = 9.91e37;

/// The least and the greatest voltage seen.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct VoltRange {
    pub(super) least: f64,
    pub(super) greatest: f64,
    readings: u64,
    at_least: u64,
    at_greatest: u64,
    clipped: u64,
}

impl Default for VoltRange {
    fn default() -> Self {
        Self {
            least: f64::INFINITY,
            greatest: f64::NEG_INFINITY,
            readings: 0,
            at_least: 0,
            at_greatest: 0,
            clipped: 0,
        }
    }
}

impl VoltRange {
    /// Takes in a voltage, or says why it is none.
    pub(super) fn see(&mut self, volts: f64) -> Result<(), &'static str> {
        if volts.abs() >= BEYOND_RANGE {
            if volts.abs() >= NOT_A_NUMBER {
                return Err("stands for a missing reading (not a number)");
            }
            // Beyond every threshold on its side, so the level is known; the voltage is not.
            self.clipped += 1;
            return Ok(());
        }
        self.readings += 1;
        if volts < self.least {
            (self.least, self.at_least) = (volts, 0);
        }
        if volts > self.greatest {
            (self.greatest, self.at_greatest) = (volts, 0);
        }
        self.at_least += u64::from(volts == self.least);
        self.at_greatest += u64::from(volts == self.greatest);
        Ok(())
    }

    /// Readings that the instrument marked as beyond its range.
    pub(super) fn clipped(&self) -> u64 {
        self.clipped
    }

    /// Says so where the voltage never reaches both thresholds: such a line never changes.
    pub(super) fn misses(
        &self,
        name: &str,
        pair: Thresholds,
        channels: &[Channel],
        faults: &mut Faults,
    ) -> bool {
        let Self { least, greatest, .. } = *self;
        // A range of no reading, or with readings beyond it, is not known.
        if self.readings == 0 || self.clipped > 0 {
            return false;
        }
        let (falling, rising) = (pair.falling_v(), pair.rising_v());
        let what = match (least <= falling, greatest >= rising) {
            (true, true) => return false,
            (false, false) => format!("never leaves the band between {falling} V and {rising} V"),
            (true, false) => format!("never reaches the upper threshold of {rising} V"),
            (false, true) => format!("never reaches the lower threshold of {falling} V"),
        };
        let clipped = self.seems_clipped(least > falling, greatest < rising);
        faults.whole_file(format!("channel {name} {what}: it holds {least} V to {greatest} V{clipped}"));
        propose(name, (least, greatest), channels, faults);
        true
    }

    /// Many readings at exactly the end that misses its threshold look like the end of the recorder's range.
    fn seems_clipped(&self, below: bool, above: bool) -> String {
        let many = |count: u64| count >= 3 && count * 10 >= self.readings && self.least < self.greatest;
        let end = match (below && many(self.at_least), above && many(self.at_greatest)) {
            (_, true) => (self.at_greatest, self.greatest),
            (true, _) => (self.at_least, self.least),
            _ => return String::new(),
        };
        format!(
            ", {} of {} readings exactly {} V (clipped by the recorder's range?)",
            end.0, self.readings, end.1
        )
    }
}

/// A range in volts as narrow as this is taken for noise: no logic has so small a swing (common practice; the smallest
/// in use, that of LVDS, is a quarter of a volt, TIA-644, from memory).
const NOISE_VOLTS: f64 = 0.1;

/// Whether a voltage that changes so little is likely to be nothing but noise.
pub(super) fn is_noise(least: f64, greatest: f64) -> bool {
    greatest > least && greatest - least < NOISE_VOLTS
}

/// Thresholds at 30 % and 70 % of the range seen, as CMOS inputs have them of their supply (common practice).
///
/// Where the range looks like noise, the other ones among `channels` are proposed instead.
pub(super) fn propose(name: &str, (least, greatest): (f64, f64), channels: &[Channel], faults: &mut Faults) {
    if is_noise(least, greatest) {
        let others: Vec<Channel> = channels.iter().filter(|channel| channel.name != name).cloned().collect();
        let Some(other) = others.first() else {
            faults.help(
                "check the probe and the range of the recorder; if it is the contact all the same, state two \
                 thresholds inside that range",
            );
            return;
        };
        faults.help(format!("is this the right channel? the others are: {}", listed(&others)));
        faults.lack(Lack::Channel { such_as: Some(other.name.clone()) });
        return;
    }
    let at = |part: f64| {
        let volts = least + part * (greatest - least);
        // Three digits of the range are as much as a proposal is worth.
        let digits = 2 - (greatest - least).log10().floor().clamp(-9.0, 9.0) as i32;
        let factor = 10_f64.powi(digits);
        (volts * factor).round() / factor
    };
    match Thresholds::try_new(at(0.3), at(0.7)) {
        Ok(pair) => {
            faults.help(format!(
                "give a falling and a rising threshold, such as {} V and {} V (30 % and 70 % of that range)",
                pair.falling_v(),
                pair.rising_v()
            ));
            faults.lack(Lack::Thresholds { proposed: Some(pair) });
        }
        Err(_) => faults.help("the voltage never changes: is this the right channel?"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(volts: &[f64], expected: Option<&str>) {
        let mut range = VoltRange::default();
        for &volts in volts {
            range.see(volts).expect("a voltage");
        }
        let mut faults = Faults::default();
        let misses = range.misses("a", Thresholds::try_new(0.8, 2.0).expect("in order"), &[], &mut faults);
        assert_eq!(misses, expected.is_some());
        let message = misses.then(|| faults.into_error("f").faults()[0].message().to_owned());
        assert_eq!(message.as_deref(), expected);
    }

    #[test]
    fn range_that_reaches_both_thresholds_is_none_of_our_business() {
        check(&[0.8, 2.0], None);
        check(&[], None);
        // Readings beyond the recorder's range are beyond both thresholds too.
        check(&[0.1, 9.9e37], None);
    }

    #[test]
    fn range_short_of_a_threshold_is_told() {
        check(
            &[0.1, 1.9],
            Some("channel a never reaches the upper threshold of 2 V: it holds 0.1 V to 1.9 V"),
        );
        check(
            &[0.9, 3.3],
            Some("channel a never reaches the lower threshold of 0.8 V: it holds 0.9 V to 3.3 V"),
        );
        check(
            &[1.0, 1.5],
            Some("channel a never leaves the band between 0.8 V and 2 V: it holds 1 V to 1.5 V"),
        );
        let clipped = "channel a never reaches the upper threshold of 2 V: it holds 0 V to 1.5 V, 3 of 5 readings \
                       exactly 1.5 V (clipped by the recorder's range?)";
        check(&[0.0, 1.5, 1.5, 1.5, 0.2], Some(clipped));
    }

    #[test]
    fn range_missing_reading_is_refused() {
        assert!(VoltRange::default().see(9.91e37).is_err());
        let mut range = VoltRange::default();
        assert_eq!((range.see(-9.9e37), range.clipped()), (Ok(()), 1));
    }
}
