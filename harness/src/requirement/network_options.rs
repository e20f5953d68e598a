//! The network as options; an option stands over the file.

use clap::Args;

use super::NetworkTable;
use super::options::over;
use super::words::{DiodeKind, Quickened};
use crate::network::ClassName;
use crate::quantity::{
    Capacitance, Current, Part, Resistance, Share, ShortTime, TickPeriod, Voltage, VoltageRange,
};

/// A network as options of a command.
///
/// A part is a value and its tolerance: "10 kohm 5 %", "100 nF 10 % X7R"; a letter (F, G, J, K, M, Z) does as well.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(next_help_heading = "Network")]
pub struct NetworkOptions {
    /// Class of the input: lvcmos-5, lvcmos-3.3, lvcmos-2.5, lvcmos-1.8, lvcmos-1.5, ttl, schmitt-hc, schmitt-hc-hex,
    /// schmitt-hct, schmitt-pin, industrial-1, industrial-2 or industrial-3
    #[arg(long, value_name = "CLASS")]
    pub input: Option<ClassName>,
    /// Thresholds of a rising edge in place of a class: "1.5 V to 2.2 V"
    #[arg(long, value_name = "VOLTS")]
    pub rising: Option<VoltageRange>,
    /// Thresholds of a falling edge; those of a rising one without it
    #[arg(long, value_name = "VOLTS")]
    pub falling: Option<VoltageRange>,
    /// Supply: "3.3 V 5 %"
    #[arg(long, value_name = "VOLTS")]
    pub supply: Option<Part<Voltage>>,
    /// Resistor that pulls the open line to its level
    #[arg(long, value_name = "OHMS")]
    pub pull: Option<Part<Resistance>>,
    /// Resistor between the line and the capacitor
    #[arg(long, value_name = "OHMS")]
    pub series: Option<Part<Resistance>>,
    /// Resistor between the contact and the line; the cable discharges without it, the capacitor through it
    #[arg(long, value_name = "OHMS")]
    pub discharge: Option<Part<Resistance>>,
    /// Capacitor at the pin: "100 nF 10 % X7R"
    #[arg(long, value_name = "FARADS")]
    pub capacitor: Option<Part<Capacitance>>,
    /// What the voltage across it takes from a ceramic capacitor, by its data sheet
    #[arg(long, value_name = "SHARE")]
    pub bias_loss: Option<Share>,
    /// Diode across the series resistor: silicon or schottky
    #[arg(long, value_name = "KIND")]
    pub diode: Option<DiodeKind>,
    /// The edge that the diode makes quicker: make or break
    #[arg(long, value_name = "EDGE")]
    pub quickens: Option<Quickened>,
    /// Capacitance of the cable to the contact
    #[arg(long, value_name = "FARADS")]
    pub cable: Option<Part<Capacitance>>,
    /// Least resistance across the open contact: dirt, moisture, cable
    #[arg(long, value_name = "OHMS")]
    pub cable_leakage: Option<Resistance>,
    /// Greatest leakage of the pin, either way
    #[arg(long, value_name = "AMPERES")]
    pub pin_leakage: Option<Current>,
    /// Resistance of the closed contact
    #[arg(long, value_name = "OHMS")]
    pub contact_resistance: Option<Resistance>,
    /// Least current that the contact needs to stay clean, by its data sheet
    #[arg(long, value_name = "AMPERES")]
    pub least_current: Option<Current>,
    /// Greatest current that the contact bears
    #[arg(long, value_name = "AMPERES")]
    pub most_current: Option<Current>,
    /// Of the flip-flop that samples the pin: time from the sample to its use
    #[arg(long, value_name = "TIME", help_heading = "Synchroniser")]
    pub settling: Option<ShortTime>,
    /// Its time constant
    #[arg(long, value_name = "TIME", help_heading = "Synchroniser")]
    pub tau: Option<ShortTime>,
    /// Its window, T0
    #[arg(long, value_name = "TIME", help_heading = "Synchroniser")]
    pub window: Option<ShortTime>,
    /// Samples a second: "1 kHz"
    #[arg(long, value_name = "RATE", help_heading = "Synchroniser")]
    pub sample_rate: Option<TickPeriod>,
    /// Edges of the line a second
    #[arg(long, value_name = "RATE", help_heading = "Synchroniser")]
    pub edge_rate: Option<TickPeriod>,
}

impl NetworkOptions {
    /// These options over what a file says.
    #[must_use]
    pub fn over(&self, mut table: NetworkTable) -> NetworkTable {
        over(&mut table.input, &self.input, "--input");
        over(&mut table.rising, &self.rising, "--rising");
        over(&mut table.falling, &self.falling, "--falling");
        over(&mut table.supply, &self.supply, "--supply");
        over(&mut table.pull, &self.pull, "--pull");
        over(&mut table.series, &self.series, "--series");
        over(&mut table.discharge, &self.discharge, "--discharge");
        over(&mut table.capacitor, &self.capacitor, "--capacitor");
        over(&mut table.bias_loss, &self.bias_loss, "--bias-loss");
        over(&mut table.diode, &self.diode, "--diode");
        over(&mut table.quickens, &self.quickens, "--quickens");
        over(&mut table.cable, &self.cable, "--cable");
        over(&mut table.cable_leakage, &self.cable_leakage, "--cable-leakage");
        over(&mut table.pin_leakage, &self.pin_leakage, "--pin-leakage");
        over(&mut table.contact_resistance, &self.contact_resistance, "--contact-resistance");
        over(&mut table.least_current, &self.least_current, "--least-current");
        over(&mut table.most_current, &self.most_current, "--most-current");
        let synchroniser = &mut table.synchroniser;
        over(&mut synchroniser.settling, &self.settling, "--settling");
        over(&mut synchroniser.tau, &self.tau, "--tau");
        over(&mut synchroniser.window, &self.window, "--window");
        over(&mut synchroniser.sample_rate, &self.sample_rate, "--sample-rate");
        over(&mut synchroniser.edge_rate, &self.edge_rate, "--edge-rate");
        table
    }
}

#[cfg(test)]
mod tests {
    use clap::CommandFactory;

    use super::*;
    use crate::network::INPUT_CLASSES;

    /// A class that no help names is one that nobody finds.
    #[test]
    fn input_option_names_every_class() {
        #[derive(clap::Parser)]
        struct Command {
            #[command(flatten)]
            _network: NetworkOptions,
        }
        let command = Command::command();
        let input = command.get_arguments().find(|argument| argument.get_id() == "input").expect("an option");
        let help = input.get_help().expect("a help").to_string();
        let named: Vec<&str> = help.split([' ', ',', ':', '\n']).collect();
        for class in INPUT_CLASSES {
            assert!(named.contains(&class.name), "{} is not in {help}", class.name);
        }
    }
}
