//! From settled positions to what a person or a machine meant by them.

mod detent;
mod gesture;
mod matrix;
mod pair;
mod pulse;
mod quadrature;
mod speed;

pub use detent::{DetentState, Detents, RestPhases};
pub use gesture::{Gesture, GestureError, GestureEvent, GestureState, GestureTicks};
pub use matrix::{KeyDiodes, Matrix, MatrixReport, MatrixState};
#[cfg(feature = "embedded-hal")]
pub use matrix::{MatrixPins, ScanError};
pub use pair::{ContactPair, PairFault, PairKind, PairPositions, PairReport, PairState};
pub use pulse::{
    PulseCounter, PulseEvent, PulseFlaw, PulseLimits, PulseLimitsError, PulseState, PulseTally, TallyFull,
};
pub use quadrature::{Phases, Quadrature, QuadratureEvent, QuadratureState, Resolution, Turn};
pub use speed::{Speed, SpeedState};
