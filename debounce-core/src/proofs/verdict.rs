//! Why the closed forms behind [`Verdict`](crate::Verdict) hold for numbers of any size.
//!
//! Text only. Inside the sizes that the tests `closed_form_*` state, every answer is also compared with exhaustive
//! search; beyond them it stands on what follows. Words are those of [the proof of the limit](super): samples after a
//! change are numbered from 1, a sample is *settled* when it is neither bouncing nor disturbed, a *window* is a
//! disturbance. Everything is said of a make; a break is its mirror image. `B` is the bounce of the make, `Go` and `Gc`
//! are the widest windows begun while open and while closed, `q` is quiet, `c` is calm, `D` is the closed dwell.
//!
//! # Counting contrary samples
//!
//! The [state machine](crate::StateMachine) with confirm `k`, patience `p` and lock-out `l` at a make, and `k'`, `p'` at a
//! break; the [unanimous window](crate::ShiftRegister) of n samples is the case `k = k' = n`, `p = p' = 1`, `l = 0`. With
//!
//! ```text
//! disturbed  = Gc > 0 and c < k           a window can fall into the count of a make
//! clears     = disturbed and p <= Gc      and undo it
//! W = k + max(from bounce, from straddling)
//!   from bounce     = B + k - 1 + Gc                         where a window clears
//!                     B + Gc (1 + floor((k - 1 - c) / q))    where it only delays
//!                     B                                      where none can fall
//!   from straddling = max(0, Go - 1) + Gc (1 + floor((k - 1 - f) / q))   where Gc > 0 and k > f = max(q, c)
//!                     max(0, Go - 1)                                     else
//! ```
//!
//! the answer is, in this order:
//!
//! 1. *False edge* where `Go > 0` and (`k <= Go` or `p > q`).
//! 2. *False edge* where `R + A >= k'`, with `R = B - k - l` and `A = Gc` if `Gc > 0`, `R > 0` and (`c = 0` or
//!    `c < p'`), else 0; or the same with `R = B - (k - Go) - l` and, for `A = Gc`, also `p - 1 + B + p' - 1 >= q`.
//!    (A negative `R` is 0.)
//! 3. *Missed* where a window clears and `q < k`.
//! 4. *Unknown* where `D < W + l` or `D < B + Gc + 2 p'`.
//! 5. Else faithful, with a make latency of at least `k - Go` and at most `W`, both attained.
//!
//! **At rest.** Call the machine *at rest* in a position when nothing is pending, nothing bounces or is locked out, and
//! the count holds samples of one window only, begun in this position, since whose end all samples agreed. Both
//! starts are. At rest the count holds at most `Go` samples; with `k > Go` nothing is reported. Before the next window q
//! samples agree, and `p <= q` of them clear the count: the machine stays at rest until the contact changes.
//! If `k <= Go`, one window that reads closed throughout is reported. If `p > q`, windows of one sample that are q samples
//! apart are never cleared, and the k-th is reported. That is 1.
//!
//! **The report of a make** from rest comes at some sample r. Of the samples that it counts at most `Go` lie before the
//! make or in a straddling window, so `r >= k - Go`; without such samples `r >= k`. As `k > Go`, it comes after a straddling
//! window has ended. A window of `Go` contrary samples that ends just before the make, and then closed samples, attain
//! `k - Go`: the least latency of 5.
//!
//! **Back after the report.** The lock-out passes over l samples, so at most `B - r - l` bouncing ones are left to count
//! toward a break. Let `Gc > 0`. Of two windows the first is cleared before the second, by 1 for the break (`p' <= q`), so
//! one window counts, with at most `Gc` samples beyond the bounce. It counts together with bouncing samples only if fewer
//! than `p'` agreeing ones lie between, while c settled ones must where `c > 0`; hence `c = 0` or `c < p'`. If the report
//! was aided by a window before it, q samples lie between that window and this one: at most `p - 1` agreeing ones before the
//! make (p would have cleared the count), B, and at most `p' - 1` after the bounce. Without bouncing samples a
//! window alone counts at most `Gc < k'`, by 1. So 2 not being met, nothing false is reported. If it is met, so it is by
//! this waveform: the window of `Go` samples and `p - 1` quiet ones, where the second form is meant; the make; closed samples
//! until the report, l more of any kind, and open ones to the end of the bounce; c settled samples (`p' - 1` in the second
//! form); a window that reads open.
//!
//! **No longer than W.** At the make nothing is locked out and the count may be taken as empty: more in it only
//! helps. Let the straddling window, if there is one, cover w samples.
//! *No window can fall into the count:* after `max(B, w)` come settled samples, k of them at least before a window
//! (`c >= k`, or there is none), and `w <= Go - 1`.
//! *Windows clear, q >= k:* if `w >= B`, the q settled samples behind it bring the report. Else let the first window that
//! covers a sample after B begin behind j settled ones. If `j >= k` they bring the report, else it ends at
//! `B + k - 1 + Gc` or before, and q settled samples follow.
//! *Windows delay:* behind `max(B, w)` every settled sample counts, and a window clears none of them: the
//! sample before it was settled and counted, so at most `Gc < p` in a row agree. k settled samples are needed. The first
//! window comes behind c of them, every further one behind q more; if `w >= B`, the first comes behind q as well.
//! That counts the windows in W. Each bound is attained: the bounce and the windows read open, and the
//! windows come as early as they may, the clearing one as late as it may.
//! If windows clear and `q < k`, a window behind `max(c, ...) <= k - 1` settled samples and one behind every q more, each
//! reading open, keep the count below k for ever: 3.
//!
//! **To rest again.** By 4 the next change comes after the report and the lock-out, and after sample `B + Gc + 2 p'`. After B
//! either `p'` settled samples follow, or a window that begins behind fewer ends at `B + p' - 1 + Gc` or before and
//! `q >= p'` settled ones follow. Either clears what the bounce left, and the machine is at rest. ∎
//!
//! # Counting up and down
//!
//! The [integrator](crate::Integrator) of full scale `N`, with step `u` for a closed and `v` for an open sample. The count is
//! measured from the end where it rests. Let `n = ceil(N / u)`, the settled samples from end to end. In this order:
//!
//! 1. *False edge* where `Go > 0` and (`Go u >= N` or `q v < Go u`).
//! 2. *False edge* where a count back reaches N: `max(0, R v - c u) + Gc v >= N` or `R v >= N` with `R = max(0, B - n)`; or, for
//!    some `a >= 0` with `a v <= Go u`, the same with `R = max(0, B - ceil((N - Go u + a v) / u))` and
//!    `max(c, q - a - B)` in place of c.
//! 3. Where `Gc > 0`, `c < n` and `q u < N`: *missed* if `q u <= Gc v`, else *unknown*.
//! 4. *False edge* where `Gc > 0` and `q u < Gc v` (1 for the break).
//! 5. *Unknown* where `Gc > 0` and `q u = Gc v`; or where D is less than W or than `B + Gc + M`, with `M = n` for `Gc = 0`, else
//!    `M = (ceil(N / (q u - Gc v)) + 1)(q + Gc)`.
//! 6. Else faithful, with a make latency of at least `n - Go` and at most
//!
//! ```text
//! W = max(Go - 1 + n, B + n - 1 + Gc + ceil((N - max(0, (n - 1) u - Gc v)) / u))   where Gc > 0 and c < n
//!     max(Go - 1, B) + n                                                          else
//! ```
//!
//! **At rest**, with an empty count at the start of each window, a window raises it to at most `Go u < N`, and q agreeing samples
//! take `q v >= Go u` off again. If `Go u >= N` one window is reported; if `q v < Go u` windows that come as often as they may
//! raise the count by at least 1 each time, until one is reported. That is 1, and 4 for the break.
//!
//! **Back after the report.** The count at the make is at most `Go u - a v`, where a samples lie between the window and the make, or 0.
//! So the report comes at `ceil((N - Go u + a v) / u)` or later, or at n or later, and R bounds the bouncing samples
//! that are left. Each raises the count back by at most v. g settled samples take `g u` off before the window after the
//! bounce, with `g >= c`, and `a + B + g >= q` if there was a window before the make. Of further windows none reaches higher, because
//! between two of them `q u >= Gc v` is taken off (by 4). The greatest value is that of 2, and it is attained by the waveform in
//! which each number takes the value named.
//!
//! **No longer than W.** With `Gc = 0` or `c >= n`, n settled samples follow `max(B, Go - 1)`. Otherwise `q u >= N`, so at least n
//! settled samples follow each window, and one window at most delays the report: after a straddling one at
//! `Go - 1 + n`; else one that begins behind j settled samples, `j <= n - 1`, when the count is `j u`. It takes `Gc v` off, but not
//! below 0, and the report comes at `B + j + Gc + ceil((N - max(0, j u - Gc v)) / u)`. One more j adds 1 to the second term and takes at most 1
//! off the last, so `j = n - 1` is the worst, and `c < n` allows it.
//! If instead `q u < N` and `q u <= Gc v`, a window behind `n - 1` settled samples, when the count is below N, and one behind every q more leave
//! the count at most as high before each window as before the one before, or at `q u < N`: it never gets there. That is 3.
//!
//! **To rest again.** After the bounce the count back is below N. A window and the q samples behind it take at least `q u - Gc v >= 1` off
//! it, and without windows n settled samples empty it: after `B + Gc + M` it has been empty at the end of some quiet
//! stretch, and from then on the integrator is at rest. ∎
//!
//! # A majority of a window
//!
//! A window of the line as wide as the majority, reading contrary throughout, is reported: *false edge*. Everything else is
//! *unknown* here.
