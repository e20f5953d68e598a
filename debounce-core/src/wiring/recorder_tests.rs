extern crate std;

use std::string::ToString;
use std::vec::Vec;

use super::*;
use Recorded::{At, Lost};

const KINDS: [Recorded; 3] = [At(Position::Open), At(Position::Closed), Lost];

fn take<const N: usize>(recorder: &mut Recorder<N>, recorded: Recorded, ticks: u32) {
    match recorded {
        At(position) => (0..ticks).for_each(|_| recorder.sample(position)),
        Lost => recorder.lost(ticks),
    }
}

/// Runs as they should come out: neighbours alike joined.
fn joined(history: &[(Recorded, u32)]) -> Vec<RecordedRun> {
    let alike = history.chunk_by(|a, b| a.0 == b.0);
    alike.map(|runs| RecordedRun { recorded: runs[0].0, ticks: runs.iter().map(|run| run.1).sum() }).collect()
}

#[test]
fn recorder_every_history_reads_back() {
    for code in 0..3_usize.pow(9) {
        let history: Vec<_> = (0..9).map(|tick| (KINDS[code / 3_usize.pow(tick) % 3], 1)).collect();
        let mut ring = Recorder::<4>::new(RecorderMode::Ring);
        let mut stop = Recorder::<4>::new(RecorderMode::StopWhenFull);
        for taken in 0..=history.len() {
            let runs = joined(&history[..taken]);
            let dropped = runs.len().saturating_sub(4);
            assert!(ring.runs().eq(runs[dropped..].iter().copied()), "{:?}", &history[..taken]);
            assert!(stop.runs().eq(runs[..runs.len().min(4)].iter().copied()), "{:?}", &history[..taken]);
            assert_eq!(usize::try_from(ring.forgotten()), Ok(dropped));
            assert_eq!((stop.is_stopped(), stop.forgotten()), (dropped > 0, 0));
            assert!(!ring.is_stopped());
            if let Some(&(recorded, ticks)) = history.get(taken) {
                take(&mut ring, recorded, ticks);
                take(&mut stop, recorded, ticks);
            }
        }
    }
}

#[test]
fn recorder_long_run_takes_a_second_entry_and_keeps_its_length() {
    for recorded in KINDS {
        for ticks in [16_382, 16_383, 16_384, 16_385, 70_000] {
            let mut recorder = Recorder::<6>::new(RecorderMode::StopWhenFull);
            let other = if recorded == KINDS[0] { KINDS[1] } else { KINDS[0] };
            let history = [(other, 1), (recorded, ticks), (other, 2)];
            history.iter().for_each(|&(recorded, ticks)| take(&mut recorder, recorded, ticks));
            assert!(recorder.runs().eq(joined(&history)), "{recorded:?} {ticks}");
        }
    }
}

#[test]
fn recorder_longest_run_goes_on_as_another() {
    let mut recorder = Recorder::<8>::new(RecorderMode::Ring);
    recorder.lost(MOST - 1);
    recorder.lost(1);
    let longest = RecordedRun { recorded: Lost, ticks: MOST };
    assert!(recorder.runs().eq([longest]));
    recorder.lost(1);
    assert!(recorder.runs().eq([longest, RecordedRun { recorded: Lost, ticks: 1 }]));
    recorder.clear();
    recorder.lost(0);
    assert_eq!(recorder.runs().count(), 0);
    let mut recorder = Recorder::<40>::new(RecorderMode::StopWhenFull);
    recorder.lost(u32::MAX);
    assert_eq!(recorder.runs().map(|run| u64::from(run.ticks)).sum::<u64>(), u64::from(u32::MAX));
}

/// Runs of one entry and of two through recorders of every small size: what is kept is whole, and nothing is silent.
#[test]
fn recorder_of_any_size_keeps_whole_runs() {
    fn check<const N: usize>() {
        let lengths = [1, 16_383, 16_384, 40_000];
        for code in 0..4_usize.pow(4) {
            let history: Vec<_> =
                (0..4).map(|run| (KINDS[run % 3], lengths[code / 4_usize.pow(run as u32) % 4])).collect();
            let expected = joined(&history);
            let mut ring = Recorder::<N>::new(RecorderMode::Ring);
            let mut stop = Recorder::<N>::new(RecorderMode::StopWhenFull);
            for &(recorded, ticks) in &history {
                take(&mut ring, recorded, ticks);
                take(&mut stop, recorded, ticks);
            }
            let kept: Vec<_> = ring.runs().collect();
            assert!(!kept.is_empty() && expected.ends_with(&kept), "{N} {history:?}: {kept:?}");
            assert_eq!(kept.len() + usize::try_from(ring.forgotten()).unwrap(), expected.len());
            let kept: Vec<_> = stop.runs().collect();
            let (last, before) = kept.split_last().unwrap();
            assert!(expected.starts_with(before), "{N} {history:?}: {kept:?}");
            let full = expected[before.len()];
            // A run that grew until there was no room stops at what one entry holds.
            assert!(
                *last == full
                    || stop.is_stopped() && last.recorded == full.recorded && last.ticks == MOST_LOW
            );
            assert_eq!(stop.is_stopped(), kept != expected, "{N} {history:?}");
        }
    }
    check::<2>();
    check::<3>();
    check::<4>();
    check::<5>();
    check::<8>();
}

#[test]
fn recorder_text_says_what_is_missing() {
    let tick = Period::from_hz(30);
    let mut ring = Recorder::<3>::new(RecorderMode::Ring);
    let head = "debounce-core recorder 1\ntick 100000000/3 ns\n";
    assert_eq!(ring.text(tick).to_string(), std::format!("{head}forgotten 0\nend 0 running\n"));
    let mut stop = Recorder::<3>::new(RecorderMode::StopWhenFull);
    for tick in 0..5 {
        ring.sample(Position::closed_if(tick & 1 == 1));
        stop.sample(Position::closed_if(tick & 1 == 1));
    }
    assert_eq!(ring.text(tick).to_string(), std::format!("{head}forgotten 2\no1 c1 o1\nend 3 running\n"));
    assert_eq!(stop.text(tick).to_string(), std::format!("{head}forgotten 0\no1 c1 o1\nend 3 stopped\n"));
    ring.clear();
    assert_eq!(ring.text(tick).to_string(), std::format!("{head}forgotten 0\nend 0 running\n"));
}

#[test]
fn recorder_text_breaks_lines_after_sixteen_runs() {
    for (runs, expected) in
        [(15, &[15][..]), (16, &[16]), (17, &[16, 1]), (32, &[16, 16]), (33, &[16, 16, 1])]
    {
        let mut recorder = Recorder::<40>::new(RecorderMode::Ring);
        (0..runs).for_each(|tick| recorder.sample(Position::closed_if(tick & 1 == 1)));
        let text = recorder.text(Period::from_ms(1)).to_string();
        let lines = text.lines().skip(3).filter(|line| !line.starts_with("end"));
        assert_eq!(lines.map(|line| line.split(' ').count()).collect::<Vec<_>>(), expected);
    }
}
