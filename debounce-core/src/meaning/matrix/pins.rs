//! Scanning a matrix over embedded-hal pins: [`MatrixPins`].

use core::fmt;

use embedded_hal::delay::DelayNs;
use embedded_hal::digital::{InputPin, OutputPin};

use crate::bank::Word;

/// A pin that failed during a scan; the scan gives no sample.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum ScanError<RowError, ColumnError> {
    /// A row could not be driven.
    Row {
        /// Which one, from 0.
        row: usize,
        /// What the pin said.
        error: RowError,
    },
    /// A column could not be read.
    Column {
        /// Which one, from 0.
        column: usize,
        /// What the pin said.
        error: ColumnError,
    },
}

impl<R, C> fmt::Display for ScanError<R, C> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Row { row, .. } => write!(f, "row {row} could not be driven; the scan was not used"),
            Self::Column { column, .. } => {
                write!(f, "column {column} could not be read; the scan was not used")
            }
        }
    }
}

impl<R: fmt::Debug, C: fmt::Debug> core::error::Error for ScanError<R, C> {}

/// Scans a matrix: drives one row low, waits until the columns have settled, reads them, lets the row go.
///
/// Columns have pull-ups; a key that joins its column to the driven row reads low and is closed. Rows must be
/// open-drain outputs, or every key must have a diode: otherwise two keys in one column short two outputs.
///
/// # Method
/// Row scan, as in D. Dribin, "Keyboard Matrix Help", 2000. A scan begins by letting all rows go. A pin that returns an
/// error ends it: the row is let go, the error is returned, and there is no sample, so the [`Matrix`](super::Matrix) is not stepped and keeps its
/// state. Later scans are whole again. A scan lost like that is a lost tick.
///
/// # Units
/// One call to [`scan`](Self::scan) is one sample of every key and takes at least `R` times the settle time, which is
/// in microseconds: allow several time constants of pull-up and line capacitance.
///
/// # Bounds
///
/// | Quantity                              | Value            | Proof                                      |
/// |---------------------------------------|------------------|--------------------------------------------|
/// | rows driven while columns are read    | exactly 1        | `matrix_pins_scan_drives_one_row_at_a_time`    |
/// | rows driven after a scan, failed or not | none, unless letting go failed | `matrix_pins_error_of_any_pin_gives_no_sample` |
/// | samples from a scan with an error     | none             | same                                       |
///
/// # State
/// The pins, the delay and 4 bytes.
///
/// # Panics
/// Never. More columns than the word has lanes do not compile.
///
/// # Examples
/// ```
/// use debounce_core::{KeyDiodes, Machine, Matrix, MatrixPins};
/// use embedded_hal::delay::DelayNs;
/// use embedded_hal::digital::{InputPin, OutputPin};
///
/// fn scan_forever(rows: [impl OutputPin; 4], columns: [impl InputPin; 3], delay: impl DelayNs, tick: impl Fn()) {
///     const PAD: Matrix<u8, 4, 2> = Matrix::new(KeyDiodes::None);
///     let mut pins = MatrixPins::new(rows, columns, delay, 10);
///     let mut state = PAD.power_up();
///     loop {
///         tick();
///         if let Ok(keys) = pins.scan() {
///             let report = PAD.step(&mut state, keys);
///             // ...
///         }
///     }
/// }
/// ```
#[derive(Debug)]
pub struct MatrixPins<Row, Column, D, const R: usize, const C: usize> {
    rows: [Row; R],
    columns: [Column; C],
    delay: D,
    settle_us: u32,
}

impl<Row, Column, D, const R: usize, const C: usize> MatrixPins<Row, Column, D, R, C>
where
    Row: OutputPin,
    Column: InputPin,
    D: DelayNs,
{
    /// These pins, with `settle_us` microseconds between driving a row and reading the columns.
    #[must_use]
    pub const fn new(rows: [Row; R], columns: [Column; C], delay: D, settle_us: u32) -> Self {
        Self { rows, columns, delay, settle_us }
    }

    /// One sample of every key: for each row the columns that are closed.
    ///
    /// # Errors
    /// The first error of a pin; there is no sample then.
    pub fn scan<W: Word>(&mut self) -> Result<[W; R], ScanError<Row::Error, Column::Error>> {
        const { assert!(C <= W::LANES as usize, "more columns than the word has lanes: use a wider word") };
        // Whatever a failed scan or power-up has left behind, no row is driven beside the one that is read.
        for (row, pin) in self.rows.iter_mut().enumerate() {
            pin.set_high().map_err(|error| ScanError::Row { row, error })?;
        }
        let mut keys = [W::NONE; R];
        for ((row, pin), read) in self.rows.iter_mut().enumerate().zip(&mut keys) {
            let sample = match pin.set_low() {
                Ok(()) => {
                    self.delay.delay_us(self.settle_us);
                    read_columns(&mut self.columns)
                }
                Err(error) => Err(ScanError::Row { row, error }),
            };
            // Let the row go in any case, even one that could not be driven.
            let released = pin.set_high().map_err(|error| ScanError::Row { row, error });
            *read = sample?;
            released?;
        }
        Ok(keys)
    }

    /// Gives the pins and the delay back.
    pub fn release(self) -> ([Row; R], [Column; C], D) {
        (self.rows, self.columns, self.delay)
    }
}

fn read_columns<W: Word, Column: InputPin, RowError>(
    columns: &mut [Column],
) -> Result<W, ScanError<RowError, Column::Error>> {
    let mut closed = W::NONE;
    for ((column, pin), lane) in columns.iter_mut().enumerate().zip(0u32..) {
        if pin.is_low().map_err(|error| ScanError::Column { column, error })? {
            closed |= W::lane(lane);
        }
    }
    Ok(closed)
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use core::cell::Cell;
    use embedded_hal::digital::{Error, ErrorKind, ErrorType};

    /// A board with diodes: the pressed keys, the rows driven low, and the pin access that is to fail.
    #[derive(Default)]
    struct Board {
        pressed: [u8; 3],
        driven: Cell<u8>,
        accesses: Cell<usize>,
        fails_at: Option<usize>,
        waited_us: Cell<u32>,
    }

    #[derive(Debug, PartialEq, Eq)]
    struct Broken;

    impl Error for Broken {
        fn kind(&self) -> ErrorKind {
            ErrorKind::Other
        }
    }

    impl Board {
        fn access(&self) -> Result<(), Broken> {
            let now = self.accesses.get();
            self.accesses.set(now + 1);
            if self.fails_at == Some(now) { Err(Broken) } else { Ok(()) }
        }
    }

    struct Pin<'a>(&'a Board, u32);

    impl ErrorType for Pin<'_> {
        type Error = Broken;
    }

    impl OutputPin for Pin<'_> {
        fn set_low(&mut self) -> Result<(), Broken> {
            self.0.access()?;
            self.0.driven.set(self.0.driven.get() | 1 << self.1);
            assert_eq!(self.0.driven.get().count_ones(), 1, "two rows are driven");
            Ok(())
        }

        fn set_high(&mut self) -> Result<(), Broken> {
            self.0.access()?;
            self.0.driven.set(self.0.driven.get() & !(1 << self.1));
            Ok(())
        }
    }

    impl InputPin for Pin<'_> {
        fn is_high(&mut self) -> Result<bool, Broken> {
            self.is_low().map(|low| !low)
        }

        fn is_low(&mut self) -> Result<bool, Broken> {
            self.0.access()?;
            let row = self.0.driven.get().trailing_zeros() as usize;
            Ok(self.0.pressed[row] >> self.1 & 1 == 1)
        }
    }

    struct Wait<'a>(&'a Board);

    impl DelayNs for Wait<'_> {
        fn delay_ns(&mut self, ns: u32) {
            self.0.waited_us.set(self.0.waited_us.get() + ns / 1000);
        }
    }

    fn pins(board: &Board) -> MatrixPins<Pin<'_>, Pin<'_>, Wait<'_>, 3, 2> {
        MatrixPins::new([0, 1, 2].map(|i| Pin(board, i)), [0, 1].map(|i| Pin(board, i)), Wait(board), 7)
    }

    #[test]
    fn matrix_pins_scan_drives_one_row_at_a_time() {
        for set in 0..64u8 {
            let pressed = [set & 3, set >> 2 & 3, set >> 4];
            let board = Board { pressed, ..Board::default() };
            assert_eq!(pins(&board).scan::<u8>(), Ok(pressed));
            assert_eq!((board.driven.get(), board.waited_us.get()), (0, 21));
        }
    }

    #[test]
    fn matrix_pins_error_of_any_pin_gives_no_sample() {
        // A whole scan lets 3 rows go, and 3 times: drives, reads two columns, lets go.
        for fails_at in 0..15 {
            let board = Board { pressed: [1, 2, 3], fails_at: Some(fails_at), ..Board::default() };
            let mut pins = pins(&board);
            let expected = match (fails_at, (fails_at + 1) % 4) {
                (0..3, _) => ScanError::Row { row: fails_at, error: Broken },
                (_, 0 | 3) => ScanError::Row { row: (fails_at - 3) / 4, error: Broken },
                (_, column) => ScanError::Column { column: column - 1, error: Broken },
            };
            assert_eq!(pins.scan::<u8>(), Err(expected));
            let left_driven = fails_at >= 3 && (fails_at - 3) % 4 == 3;
            assert_eq!(board.driven.get() != 0, left_driven, "at {fails_at}");
            assert_eq!(pins.scan::<u8>(), Ok([1, 2, 3]), "the next scan is whole again");
        }
        // And with no failure inside the scan there is a sample.
        let board = Board { pressed: [1, 2, 3], fails_at: Some(15), ..Board::default() };
        assert_eq!(pins(&board).scan::<u8>(), Ok([1, 2, 3]));
    }
}
