//! What is assumed of a network where nothing is said, and what cannot be.

use std::sync::Arc;

use super::check::point;
use super::network::{NetworkTable, ResolvedNetwork, SynchroniserTable};
use super::words::{DiodeKind, Level, Quickened};
use super::{Origin, ResolvedRow, Sourced};
use crate::network::{Diode, Input, InputClass, Network, SCHOTTKY, SILICON, Synchroniser, Thresholds};
use crate::problem::{Problem, Problems, SourceText};
use crate::quantity::{Capacitance, Current, Part, Resistance, Share, Spread, Voltage, VoltageRange};

const USUAL: &str = "common practice";
const NONE: &str = "nobody said that there is one";

/// Notes problems and rows while a table is filled in.
struct Filling<'a> {
    source: Option<&'a Arc<SourceText>>,
    problems: Vec<Problem>,
    rows: Vec<ResolvedRow>,
}

impl Filling<'_> {
    fn refuse(&mut self, origin: &Origin, message: String, help: &str) {
        // A value given as an option cannot be pointed at, so its option is named.
        let problem = match origin {
            Origin::Option(name) => Problem::new(format!("{name}: {message}")),
            _ => point(Problem::new(message), self.source, origin, ""),
        };
        self.problems.push(problem.help(help));
    }

    fn row(&mut self, key: &'static str, text: String, origin: Origin) {
        self.rows.push(ResolvedRow { key, text, origin });
    }

    /// A resistor, at least `least` ohms; `default` in its place where there is none.
    fn resistor(
        &mut self,
        key: &'static str,
        given: &Option<Sourced<Part<Resistance>>>,
        default: (Part<Resistance>, &'static str),
        least: f64,
    ) -> (Spread, Part<Resistance>) {
        const MOST: f64 = 1e8;
        let sourced = (*given).unwrap_or(Sourced::new(default.0, Origin::Default(default.1)));
        let part = sourced.value.or_tolerance(Share::from_percent(5));
        let ohms = part.value.base();
        if ohms < least || ohms > MOST {
            let message = format!("a resistor of {} cannot do this", part.value);
            let help = if ohms < least {
                "it would short the supply through the contact; write at least \"10 ohm\", usually \"10 kohm\""
            } else {
                "leakage of board and pin is stronger; write at most \"100 Mohm\""
            };
            self.refuse(&sourced.origin, message, help);
        }
        let text = if ohms > 0.0 { part.to_string() } else { "none".to_owned() };
        self.row(key, text, sourced.origin);
        (part.factor().map(|factor| factor * ohms), part)
    }

    fn capacitance(
        &mut self,
        key: &'static str,
        given: &Option<Sourced<Part<Capacitance>>>,
        tolerance: Share,
    ) -> (Spread, Option<Part<Capacitance>>) {
        let Some(sourced) = given else {
            self.row(key, "none".to_owned(), Origin::Default(NONE));
            return (Spread::fixed(0.0), None);
        };
        let part = sourced.value.or_tolerance(tolerance);
        if part.value.base() > 0.1 {
            let message = format!("a capacitor of {} is none for an input", part.value);
            self.refuse(&sourced.origin, message, "write at most \"100 mF\", usually some \"100 nF\"");
        }
        self.row(key, part.to_string(), sourced.origin);
        (part.factor().map(|factor| factor * part.value.base()), Some(part))
    }
}

impl NetworkTable {
    /// Fills in what was not given, with the contact closing the line to `closed`.
    ///
    /// # Errors
    /// Values that are impossible or contradict one another.
    pub fn resolve(
        &self,
        closed: Option<Level>,
        source: Option<&Arc<SourceText>>,
    ) -> Result<ResolvedNetwork, Problems> {
        let mut filling = Filling { source, problems: Vec::new(), rows: Vec::new() };
        let class = self.class(&mut filling);
        let needs_current = class.is_some_and(|class| class.load.is_some());
        let closed = closed.unwrap_or(if needs_current { Level::High } else { Level::Low });
        let supply = self.supply(&mut filling, class);
        let input = self.input(&mut filling, class, supply);
        let (pull, mut resistors) = self.pull(&mut filling, needs_current);
        let none = (Part::of(Resistance::from_finest(0)), NONE);
        let (series, part) = filling.resistor("network.series", &self.series, none, 0.0);
        resistors.push(("series", part));
        let (discharge, part) = filling.resistor("network.discharge", &self.discharge, none, 0.0);
        resistors.push(("discharge", part));
        let (mut capacitor, part) =
            filling.capacitance("network.capacitor", &self.capacitor, Share::from_percent(10));
        if let Some(loss) = &self.bias_loss {
            if loss.value.ppm() >= 1_000_000 {
                let message = format!("a loss of {} leaves no capacitance", loss.value);
                filling.refuse(&loss.origin, message, "write a share below 100 %, such as \"30 %\"");
            }
            filling.row("network.bias_loss", loss.value.to_string(), loss.origin);
            // All of it in the worst case, half of it typically, none where the capacitor is empty.
            let kept = 1.0 - loss.value.fraction();
            capacitor = Spread::new(capacitor.min * kept, capacitor.typ * (1.0 + kept) / 2.0, capacitor.max);
        }
        let (cable, _) = filling.capacitance("network.cable", &self.cable, Share::from_percent(20));
        let diode = self.diode(&mut filling);
        let network = Network {
            closed,
            input,
            supply,
            pull,
            discharge,
            series,
            capacitor,
            pin_capacitance: class.map_or(5e-12, |class| class.capacitance),
            cable,
            cable_leakage: self.cable_leakage(&mut filling),
            pin_leakage: self.pin_leakage(&mut filling, class),
            contact: self.contact_resistance(&mut filling),
            diode,
        };
        self.currents(&mut filling);
        let synchroniser = self.synchroniser.resolve(&mut filling);
        if let Some(problems) = Problems::from_found(filling.problems) {
            return Err(problems);
        }
        Ok(ResolvedNetwork {
            network,
            class,
            least_current: self.least_current.map(|current| current.value),
            most_current: self.most_current.map(|current| current.value),
            synchroniser,
            resistors: resistors.into_iter().filter(|(_, part)| part.value.finest() > 0).collect(),
            capacitor: part,
            bias_loss: self.bias_loss.map(|loss| loss.value),
            rows: filling.rows,
        })
    }

    fn class(&self, filling: &mut Filling<'_>) -> Option<&'static InputClass> {
        match (&self.input, &self.rising, &self.falling) {
            (Some(class), None, None) => {
                let text =
                    format!("{}: {}; {}", class.value.0.name, class.value.0.about, class.value.0.source);
                filling.row("network.input", text, class.origin);
                Some(class.value.0)
            }
            (Some(class), Some(own), _) | (Some(class), None, Some(own)) => {
                let message = format!("the input class {} has thresholds of its own", class.value);
                filling.refuse(&own.origin, message, "leave out either input or rising and falling");
                Some(class.value.0)
            }
            (None, None, Some(own)) => {
                let help = "write rising as well, such as \"1.5 V to 2.2 V\"";
                filling.refuse(&own.origin, "a falling threshold stands alone".to_owned(), help);
                None
            }
            (None, Some(_), _) => None,
            (None, None, None) => {
                let class = InputClass::named("schmitt-pin")?;
                let text = format!("{}: {}; {}", class.name, class.about, class.source);
                filling.row("network.input", text, Origin::Default(USUAL));
                Some(class)
            }
        }
    }

    fn supply(&self, filling: &mut Filling<'_>, class: Option<&'static InputClass>) -> Spread {
        let Some(sourced) = &self.supply else {
            let usual = class.map_or(Spread::new(1.62, 3.3, 5.5), |class| class.supply);
            // A class with a narrow supply means all of it; the others are run from a regulator.
            let spread = if usual.max / usual.min < 1.5 {
                usual
            } else {
                Spread::new(0.95, 1.0, 1.05).map(|f| f * usual.typ)
            };
            let text = format!("{} V to {} V", rounded(spread.min), rounded(spread.max));
            filling.row("network.supply", text, Origin::Default("the usual supply of the input"));
            return spread;
        };
        let part = sourced.value.or_tolerance(Share::from_percent(5));
        let spread = part.factor().map(|factor| factor * part.value.volts());
        if spread.min < 0.5 || spread.max > 60.0 {
            let message = format!("a supply of {} is none for an input", part.value);
            let help = "write between \"0.5 V\" and \"57 V\"; nothing here is meant for mains or for any voltage that is not safe to touch";
            filling.refuse(&sourced.origin, message, help);
        } else if let Some(class) = class
            && (spread.min < class.supply.min - 1e-9 || spread.max > class.supply.max + 1e-9)
        {
            let message = format!(
                "a supply of {part} leaves the range of the input {}, {} V to {} V",
                class.name, class.supply.min, class.supply.max
            );
            let help = "write a supply inside that range with its tolerance, or another input";
            filling.refuse(&sourced.origin, message, help);
        }
        filling.row("network.supply", part.to_string(), sourced.origin);
        spread
    }

    fn input(&self, filling: &mut Filling<'_>, class: Option<&'static InputClass>, supply: Spread) -> Input {
        if let Some(class) = class {
            return Input::Class(class);
        }
        // Only own thresholds are left; where they are missing that has been refused.
        let nothing = VoltageRange { low: Voltage::from_microvolts(0), high: Voltage::from_microvolts(0) };
        let rising = self.rising.unwrap_or(Sourced::new(nothing, Origin::Default(NONE)));
        let falling = self.falling.unwrap_or(rising);
        for (key, own) in [("network.rising", &rising), ("network.falling", &falling)] {
            let VoltageRange { low, high } = own.value;
            if self.rising.is_some() && (low.volts() <= 0.0 || high.volts() >= supply.min) {
                let message = format!("thresholds of {} lie outside what the line can show", own.value);
                let help =
                    format!("write voltages above 0 V and below {} V", (supply.min * 100.0).floor() / 100.0);
                filling.refuse(&own.origin, message, &help);
            }
            filling.row(key, own.value.to_string(), own.origin);
        }
        if falling.value.low > rising.value.low || falling.value.high > rising.value.high {
            let message =
                format!("falling thresholds of {} lie above rising ones of {}", falling.value, rising.value);
            filling.refuse(&falling.origin, message, "write the lower pair as falling");
        }
        let spread = |range: VoltageRange| {
            let (low, high) = (range.low.volts(), range.high.volts());
            Spread::new(low, f64::midpoint(low, high), high)
        };
        Input::Own(Thresholds { rising: spread(rising.value), falling: spread(falling.value) })
    }

    fn pull(
        &self,
        filling: &mut Filling<'_>,
        needs_current: bool,
    ) -> (Option<Spread>, Vec<(&'static str, Part<Resistance>)>) {
        if needs_current && self.pull.is_none() {
            let why = "the input draws the current itself";
            filling.row("network.pull", "none".to_owned(), Origin::Default(why));
            return (None, Vec::new());
        }
        let usual = (Part::of(Resistance::from_finest(10_000_000)), USUAL);
        let (spread, part) = filling.resistor("network.pull", &self.pull, usual, 10.0);
        (Some(spread), vec![("pull", part)])
    }

    fn diode(&self, filling: &mut Filling<'_>) -> Option<Diode> {
        let Some(kind) = &self.diode else {
            if let Some(quickens) = &self.quickens {
                let help = "write diode = \"silicon\" or \"schottky\" as well, or leave it out";
                filling.refuse(
                    &quickens.origin,
                    "there is no diode that could quicken an edge".to_owned(),
                    help,
                );
            }
            return None;
        };
        if self.series.is_none_or(|series| series.value.value.finest() == 0) {
            let help =
                "it lies across the series resistor; write series = \"10 kohm\" as well, or leave it out";
            filling.refuse(&kind.origin, "the diode has nothing to bridge".to_owned(), help);
        }
        let quickens = self.quickens.unwrap_or(Sourced::new(
            Quickened::Break,
            Origin::Default("the edge that the pull resistor makes slow (common practice)"),
        ));
        filling.row("network.diode", kind.value.to_string(), kind.origin);
        filling.row("network.quickens", quickens.value.to_string(), quickens.origin);
        let figures = match kind.value {
            DiodeKind::Silicon => SILICON,
            DiodeKind::Schottky => SCHOTTKY,
        };
        Some(Diode { figures, quickens_break: quickens.value == Quickened::Break })
    }

    fn cable_leakage(&self, filling: &mut Filling<'_>) -> Option<f64> {
        let leakage = self.cable_leakage.as_ref()?;
        if leakage.value.base() < 1e3 {
            let help =
                "write the least resistance across the open contact, such as \"1 Mohm\", at least \"1 kohm\"";
            filling.refuse(
                &leakage.origin,
                format!("a leakage of {} is a closed contact", leakage.value),
                help,
            );
            return None;
        }
        filling.row("network.cable_leakage", leakage.value.to_string(), leakage.origin);
        Some(leakage.value.base())
    }

    fn pin_leakage(&self, filling: &mut Filling<'_>, class: Option<&'static InputClass>) -> f64 {
        let usual = class.map_or(1e-6, |class| class.leakage);
        let Some(leakage) = &self.pin_leakage else {
            let text = Current::from_finest((usual * 1e9).round() as u64).to_string();
            filling.row(
                "network.pin_leakage",
                text,
                Origin::Default("usual limit of the input (common practice)"),
            );
            return usual;
        };
        if leakage.value.base() > 0.1 {
            let help = "write the limit of its data sheet, such as \"1 uA\", at most \"100 mA\"";
            filling.refuse(&leakage.origin, format!("no pin leaks {}", leakage.value), help);
        }
        filling.row("network.pin_leakage", leakage.value.to_string(), leakage.origin);
        leakage.value.base()
    }

    fn contact_resistance(&self, filling: &mut Filling<'_>) -> f64 {
        let usual = Sourced::new(
            Resistance::from_finest(100),
            Origin::Default("a clean metal contact (common practice)"),
        );
        let given = self.contact_resistance.unwrap_or(usual);
        if given.value.base() > 1e5 {
            let help = "write that of the closed contact, usually \"100 mohm\", of conductive rubber some \"200 ohm\", at most \"100 kohm\"";
            let message = format!("a contact of {} is not closed", given.value);
            filling.refuse(&given.origin, message, help);
        }
        filling.row("network.contact_resistance", given.value.to_string(), given.origin);
        given.value.base()
    }

    fn currents(&self, filling: &mut Filling<'_>) {
        for (key, current) in
            [("network.least_current", &self.least_current), ("network.most_current", &self.most_current)]
        {
            if let Some(current) = current {
                filling.row(key, current.value.to_string(), current.origin);
            }
        }
        if let (Some(least), Some(most)) = (&self.least_current, &self.most_current)
            && least.value > most.value
        {
            let message = format!("the contact needs {} and bears only {}", least.value, most.value);
            filling.refuse(&least.origin, message, "write a least current below the most");
        }
    }
}

impl SynchroniserTable {
    fn resolve(&self, filling: &mut Filling<'_>) -> Option<Synchroniser> {
        let Self { settling, tau, window, sample_rate, edge_rate } = self;
        let origins =
            [settling.map(|one| one.origin), tau.map(|one| one.origin), window.map(|one| one.origin)];
        let rates = [sample_rate.map(|one| one.origin), edge_rate.map(|one| one.origin)];
        let given = origins.iter().chain(&rates).flatten().next()?;
        let (Some(settling), Some(tau), Some(window), Some(clock), Some(edges)) =
            (settling, tau, window, sample_rate, edge_rate)
        else {
            let help = "write settling, tau, window, sample_rate and edge_rate, or none of them";
            filling.refuse(given, "a synchroniser has five figures".to_owned(), help);
            return None;
        };
        for one in [settling, tau, window] {
            if one.value.finest() == 0 {
                let help = "write the figure of the flip-flop's data sheet, such as \"0.31 ns\"";
                filling.refuse(&one.origin, "no flip-flop decides in no time".to_owned(), help);
            }
        }
        filling.row("network.synchroniser.settling", settling.value.to_string(), settling.origin);
        filling.row("network.synchroniser.tau", tau.value.to_string(), tau.origin);
        filling.row("network.synchroniser.window", window.value.to_string(), window.origin);
        filling.row("network.synchroniser.sample_rate", clock.value.to_string(), clock.origin);
        filling.row("network.synchroniser.edge_rate", edges.value.to_string(), edges.origin);
        Some(Synchroniser {
            settling: settling.value.base(),
            tau: tau.value.base(),
            window: window.value.base(),
            clock: clock.value.ticks_per_second(),
            edges: edges.value.ticks_per_second(),
        })
    }
}

/// Volts to the hundredth, for messages.
fn rounded(volts: f64) -> f64 {
    (volts * 100.0).round() / 100.0
}
