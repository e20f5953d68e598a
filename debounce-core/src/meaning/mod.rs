//! From settled positions to what a person or a machine meant by them.

mod detent;
mod gesture;
mod quadrature;
mod speed;

pub use detent::{DetentState, Detents, RestPhases};
pub use gesture::{Gesture, GestureError, GestureEvent, GestureState, GestureTicks};
pub use quadrature::{Phases, Quadrature, QuadratureEvent, QuadratureState, Resolution, Turn};
pub use speed::{Speed, SpeedState};
