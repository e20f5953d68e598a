//! Why the closed form of the [limit](crate::Envelope::limit) holds for numbers of any size.
//!
//! This module is text only. What it proves is also compared with exhaustive search inside stated sizes (tests
//! `limit_*`); the proof is what carries beyond them. The closed forms behind [`Verdict`](crate::Verdict) are proved in
//! [`verdict`].
//!
//! # Words
//!
//! All numbers are in delivered samples. `B` is the longest bounce after a make, `Go` and `Gc` are the widest
//! disturbances begun while open and while closed, `q` is quiet. A break is the mirror image of a make, so each step
//! is written for one of the two, whichever reads better. The samples after a change are numbered from 1, so that a
//! report at sample n is a latency of n. A sample is *settled* when it is neither bouncing nor disturbed; it then
//! reads the contact's position. A *window* is a disturbance; a window *straddles* a change when it began before it
//! and covers at least one sample after it, so at most `Go - 1` samples after a make lie in it.
//!
//! # Claim
//!
//! Let calm be 0, or more than both `Go` and `Gc`. Let `F = Gc` where calm is 0, otherwise `F = 0`: the width of a
//! disturbance that may follow the bounce at once. Let
//!
//! ```text
//! L(make) = max(B + F, Go - 1) + Go + 1          (where Go = 0, read the second term as 0)
//! ```
//!
//! 1. No faithful logic has a worst make latency below `L(make)`, whatever quiet and dwell are.
//! 2. Let q be more than both `Go` and `Gc`; or let q be at least 1 and either one of `Go` and `Gc` be 0 or calm be
//!    more than both. Let each dwell be at least the limit of the change that leads to it plus the lock-out behind it,
//!    `L(make) + max(0, B - 1)` for closed. Then the state machine with the following parameters is faithful, with
//!    worst latencies of at most `L(make)` and `L(break)`:
//!
//! ```text
//!              confirm   patience                          lock-out
//! at make      Go + 1    Gc + 1, or 1 with such a calm     max(0, B(make) - 1)
//! at break     Gc + 1    Go + 1, or 1 with such a calm     max(0, B(break) - 1)
//! ```
//!
//! Together: the limit is `L`, attained at both changes at once.
//!
//! # 1. No logic is faster
//!
//! Two waveforms that give the same samples get the same reports. If in the second of them the contact never changes,
//! a faithful logic reports nothing in either, as long as the samples are the same. Start settled at open.
//!
//! * *Behind the bounce.* First waveform: the contact makes, all `B` bouncing samples read open, then a window begun
//!   there covers `F` samples and all read open (with calm 0 it may begin at once, else `F = 0` and there is none);
//!   then the contact reads closed for `Go` samples. Second waveform: the contact stays open; after `B + F` samples a
//!   window covers `Go` samples and all read closed. The samples are the same up to number `B + F + Go`, so the report
//!   of the make comes at `B + F + Go + 1` at the earliest.
//! * *Behind a straddling window*, for `Go > 0`. First waveform: a window of `Go` samples begins one sample before the
//!   make, and all of it reads open; bounce shows nothing, and the next `Go` samples read closed. Second waveform: the
//!   contact stays open and these last `Go` samples are a window. The samples are the same up to number
//!   `Go - 1 + Go`, so the report comes at `2 Go` at the earliest.
//!
//! Each first waveform has one change and one window, each second one window only: no quiet and no dwell forbids them.
//!
//! # 2. The machine is as fast
//!
//! *Nothing pending* means that output and contact agree and every change was reported. The invariant, while nothing
//! is pending and the contact is, say, closed:
//!
//! * **(a)** no more bouncing samples are to come than ticks are locked out;
//! * **(b)** an open window was begun in the present position, so it is at most `Gc` wide;
//! * **(c)** all samples that the count holds lie in one window begun in the present position, and every sample since
//!   that window ended was settled and agreed. So the count holds at most `Gc` samples.
//!
//! It holds at the start: no bounce, no window, no count.
//!
//! **No false edge.** By (c) the count toward a break holds at most `Gc` samples, and confirm is `Gc + 1`. A report
//! while nothing is pending never happens.
//!
//! **The invariant is kept while the contact stays.** A tick takes one from both numbers of (a), if there is anything to
//! take. In the lock-out nothing is counted. After it no sample bounces, by (a), so a contrary sample lies in a window,
//! begun in the present position by (b). If the count holds samples of another, that one ended at least q settled
//! samples ago, all of which agreed; and q is at least patience: with such a calm patience is 1 and q at least 1,
//! otherwise windows in this position mean `Gc > 0`, and then patience, `Go + 1`, is at most q (if `Go = 0` it is 1). So
//! the count had been cleared. That is (c).
//!
//! **At a change** the lock-out is over: the dwell outlasts the report (below, within `L`) and the lock-out together.
//!
//! **A change is reported within L.** Let the contact break, and let `B` be the bounce of the break and `F` be `Go` or 0.
//! A contrary sample now means open, and any run of `Gc + 1` settled samples brings the report within it, since
//! nothing is locked out and each of them counts, whatever the count held before. Suppose that there is no report
//! before.
//!
//! * *With calm above both widths:* samples after number `max(B, Gc - 1)` neither bounce nor lie in a straddling window,
//!   and a new one may begin only after calm settled samples, which are at least `Gc + 1`. The report comes at
//!   `max(B, Gc - 1) + Gc + 1` at the latest.
//! * *With calm 0.* If `Go = 0` no window begins after the break and the same holds. Else `q >= Gc + 1` (also where
//!   `Gc = 0`), so at least `Gc + 1` samples lie between two windows. If a straddling window covers w samples
//!   after the break, `B <= w <= Gc - 1`, then the next `Gc + 1` samples are settled, and the report is at `w + Gc + 1` at
//!   the latest. Otherwise let W be the first window that covers a sample after number B; without one the samples
//!   after B are settled, and the report is at `B + Gc + 1`. If it begins at `B + 1` or
//!   before, it ends at `B + Go` or before, and the next `Gc + 1` samples are settled. If it begins at `B + 1 + j` with
//!   `j >= 1`, the j samples before it are settled and count. If j is more than `Gc` that is enough. If not, W cannot
//!   clear them: the sample before it was contrary, so the agreeing samples in a row number at most `Go`, less than
//!   patience. After W there are `Gc + 1` settled samples, of which `Gc + 1 - j` are enough. In each case the report comes
//!   at `B + Go + Gc + 1` at the latest.
//!
//! **The report restores the invariant.** It comes at sample r >= 1 after the break, so at most `B - 1` bouncing samples are
//! left, and as many ticks are locked out: (a). The count is empty: (c). For (b), let a window W straddle the break.
//! By (c) the count held nothing but samples of W at the break, because W's own samples are not settled. Of the
//! `Gc + 1` samples that the report takes at most `Gc` lie in W, and none before it; so it comes after W has ended.
//! Every later window is begun in the present position. ∎
//!
//! A dwell shorter than asked for in 2 is not always too short for the limit, but it may be: with `B = 5` at make and 1 at
//! break, without disturbances and with a closed dwell of 8, no logic reports a break within 2 samples, as the form
//! would say, but one does within 3.

pub mod verdict;
