//! The network in front of the pin as it is written down.

use super::section::{Reader, Section};
use super::words::{DiodeKind, Quickened};
use super::{ResolvedRow, Sourced};
use crate::network::{ClassName, InputClass, Network, Synchroniser};
use crate::quantity::{
    Capacitance, Current, Part, Resistance, Share, ShortTime, TickPeriod, Voltage, VoltageRange,
};

/// A network as far as it has been given. Every part is written with its tolerance: "10 kohm 5 %".
#[derive(Clone, PartialEq, Debug, Default)]
pub struct NetworkTable {
    /// Class of the input.
    pub input: Option<Sourced<ClassName>>,
    /// Own thresholds of a rising edge, in place of a class.
    pub rising: Option<Sourced<VoltageRange>>,
    /// Own thresholds of a falling edge; those of a rising one where they are left out.
    pub falling: Option<Sourced<VoltageRange>>,
    /// Supply.
    pub supply: Option<Sourced<Part<Voltage>>>,
    /// Pull resistor.
    pub pull: Option<Sourced<Part<Resistance>>>,
    /// Resistor between the line and the capacitor.
    pub series: Option<Sourced<Part<Resistance>>>,
    /// Resistor between the contact and the line.
    pub discharge: Option<Sourced<Part<Resistance>>>,
    /// Capacitor at the pin.
    pub capacitor: Option<Sourced<Part<Capacitance>>>,
    /// What the voltage across it takes from a ceramic capacitor.
    pub bias_loss: Option<Sourced<Share>>,
    /// Diode across the series resistor.
    pub diode: Option<Sourced<DiodeKind>>,
    /// The edge that it makes quicker.
    pub quickens: Option<Sourced<Quickened>>,
    /// Capacitance of the cable.
    pub cable: Option<Sourced<Part<Capacitance>>>,
    /// Least resistance across the open contact.
    pub cable_leakage: Option<Sourced<Resistance>>,
    /// Greatest leakage of the pin.
    pub pin_leakage: Option<Sourced<Current>>,
    /// Resistance of the closed contact.
    pub contact_resistance: Option<Sourced<Resistance>>,
    /// The current that the contact needs.
    pub least_current: Option<Sourced<Current>>,
    /// The current that the contact bears.
    pub most_current: Option<Sourced<Current>>,
    /// The flip-flop that samples the pin.
    pub synchroniser: SynchroniserTable,
}

/// A synchroniser as far as it has been given.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct SynchroniserTable {
    /// Time between the sample and its use.
    pub settling: Option<Sourced<ShortTime>>,
    /// Time constant of the flip-flop.
    pub tau: Option<Sourced<ShortTime>>,
    /// Window of the flip-flop.
    pub window: Option<Sourced<ShortTime>>,
    /// Samples a second.
    pub sample_rate: Option<Sourced<TickPeriod>>,
    /// Edges of the line a second.
    pub edge_rate: Option<Sourced<TickPeriod>>,
}

/// A network of which everything is known.
#[derive(Clone, PartialEq, Debug)]
pub struct ResolvedNetwork {
    /// The network.
    pub network: Network,
    /// Its class, where it has one.
    pub class: Option<&'static InputClass>,
    /// The current that the contact needs.
    pub least_current: Option<Current>,
    /// The current that the contact bears.
    pub most_current: Option<Current>,
    /// The synchroniser, where it is given.
    pub synchroniser: Option<Synchroniser>,
    /// The parts as written, for notes.
    pub resistors: Vec<(&'static str, Part<Resistance>)>,
    /// The capacitor as written.
    pub capacitor: Option<Part<Capacitance>>,
    /// Whether the loss under voltage is known.
    pub bias_loss: Option<Share>,
    /// Every value with where it came from.
    pub rows: Vec<ResolvedRow>,
}

pub(super) fn read(reader: &mut Reader, mut section: Section<'_>) -> NetworkTable {
    let table = NetworkTable {
        input: reader.class(&mut section, "input"),
        rising: reader.quantity(&mut section, "rising"),
        falling: reader.quantity(&mut section, "falling"),
        supply: reader.quantity(&mut section, "supply"),
        pull: reader.quantity(&mut section, "pull"),
        series: reader.quantity(&mut section, "series"),
        discharge: reader.quantity(&mut section, "discharge"),
        capacitor: reader.quantity(&mut section, "capacitor"),
        bias_loss: reader.quantity(&mut section, "bias_loss"),
        diode: reader.word(&mut section, "diode"),
        quickens: reader.word(&mut section, "quickens"),
        cable: reader.quantity(&mut section, "cable"),
        cable_leakage: reader.quantity(&mut section, "cable_leakage"),
        pin_leakage: reader.quantity(&mut section, "pin_leakage"),
        contact_resistance: reader.quantity(&mut section, "contact_resistance"),
        least_current: reader.quantity(&mut section, "least_current"),
        most_current: reader.quantity(&mut section, "most_current"),
        synchroniser: match reader.inner(&mut section, "synchroniser") {
            Some(inner) => synchroniser(reader, inner),
            None => SynchroniserTable::default(),
        },
    };
    reader.finish(section);
    table
}

fn synchroniser(reader: &mut Reader, mut section: Section<'_>) -> SynchroniserTable {
    let table = SynchroniserTable {
        settling: reader.quantity(&mut section, "settling"),
        tau: reader.quantity(&mut section, "tau"),
        window: reader.quantity(&mut section, "window"),
        sample_rate: reader.quantity(&mut section, "sample_rate"),
        edge_rate: reader.quantity(&mut section, "edge_rate"),
    };
    reader.finish(section);
    table
}
