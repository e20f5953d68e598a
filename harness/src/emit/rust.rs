//! The Rust module of a configuration.

use std::fmt::Write;

use debounce_core::{Bounds, Latency};

use super::law_code::{LawCode, constant, law_code};
use super::layout::{assertion, chain, comment, grouped, literal, paragraph};
use super::{Configuration, NotHeld, Proof, module_name, type_name};
use crate::quantity::{Rounding, TickPeriod, Time};

/// The Rust module of a configuration: constants, a ready-made type, and assertions that stop the build when the
/// parameters no longer keep the requirement.
///
/// It needs `debounce-core` and nothing else, neither the standard library nor an allocator, and is laid out as
/// `rustfmt` would.
///
/// # Errors
/// When the configuration does not hold; nothing is written then.
pub fn rust_module(configuration: &Configuration) -> Result<String, NotHeld> {
    configuration.check()?;
    Ok(module_text(configuration))
}

/// The text, whether the configuration holds or not.
pub(super) fn module_text(configuration: &Configuration) -> String {
    let law = law_code(&configuration.law);
    [
        header(configuration),
        imports(configuration, &law),
        clock(configuration),
        requirement(configuration),
        envelope(configuration),
        law_constants(configuration, &law),
        types(configuration, &law),
        checks(configuration, &law),
    ]
    .join("\n")
}

/// The documentation of the module.
fn header(configuration: &Configuration) -> String {
    let name = comment(&configuration.name);
    let mut text = paragraph("//!", &format!("Debouncing of the contact \"{name}\"."));
    let mut section = |title: &str, body: &str| {
        text.push_str("//!\n");
        if !title.is_empty() {
            let _infallible = write!(text, "//! # {title}\n//!\n");
        }
        text.push_str(body);
    };
    if let Some(caution) = configuration.role.caution() {
        // A sentence here, though error messages are none.
        let sentence = format!("{}{}.", caution[..1].to_uppercase(), &caution[1..]);
        section("Caution", &paragraph("//!", &comment(&sentence)));
    }
    section(
        "",
        &paragraph("//!", "Made by harness. Change the requirement and make it anew rather than edit it."),
    );
    for line in &configuration.provenance {
        section("", &paragraph("//!", &comment(line)));
    }
    section("What is proved", &proved(configuration));
    section("Use", &usage(configuration));
    text
}

fn proved(configuration: &Configuration) -> String {
    let how = match configuration.proof {
        Proof::ClosedForm => {
            "For every waveform inside `ENVELOPE` every operation is reported exactly once, within `BOUNDS`. The \
             closed form of the law says so, and the compiler checks it again at every build."
                .to_owned()
        }
        Proof::Explored { states } => format!(
            "For every waveform inside `ENVELOPE` every operation is reported exactly once, within `BOUNDS`. The \
             prover found this by exploring all {states} states of law and envelope. The compiler cannot check \
             it again, because the closed form of the law does not answer for this envelope; therefore the \
             parameters and the envelope are pinned: change one, and the build stops until the proof is made anew."
        ),
    };
    let delay =
        |latency: Latency| Time::from_ns(configuration.clock.delay_ns(latency.worst).1).shown(Rounding::Up);
    let bounds = configuration.bounds.latency;
    let times = format!(
        "At the clock below a make is reported after less than {}, a break after less than {}, as this was written.",
        delay(bounds.make),
        delay(bounds.break_)
    );
    format!("{}//!\n{}", paragraph("//!", &how), paragraph("//!", &times))
}

fn usage(configuration: &Configuration) -> String {
    let module = module_name(&configuration.name);
    let level = configuration.closed;
    format!(
        "//! ```ignore\n\
         //! let mut contact = {module}::starting();\n\
         //! // At every tick; the line is {level} while the contact is closed.\n\
         //! let sample = Position::closed_if(line_is_{level}());\n\
         //! if let Some(event) = contact.tick(sample) {{ /* ... */ }}\n\
         //! ```\n"
    )
}

fn imports(configuration: &Configuration, law: &LawCode) -> String {
    let mut names = vec![
        "Bounds",
        "Config",
        "ConstLaw",
        "Envelope",
        "Period",
        "Position",
        "Running",
        "Starting",
        "TickClock",
    ];
    names.extend(law.imports);
    match configuration.proof {
        Proof::ClosedForm => names.push("Verdict"),
        Proof::Explored { .. } => names.extend(["Latency", "PerChange"]),
    }
    names.sort_unstable();
    // Too many for one line, whatever the law: filled up to 100 columns.
    let (mut lines, mut line) = (String::new(), "   ".to_owned());
    for name in names {
        if line.len() + name.len() + 2 > 100 {
            lines = lines + &line + "\n";
            line = "   ".to_owned();
        }
        line = line + " " + name + ",";
    }
    format!(
        "#![allow(dead_code, reason = \"a program uses what it needs of this module\")]\n\n\
         use debounce_core::{{\n{lines}{line}\n}};\n"
    )
}

fn clock(configuration: &Configuration) -> String {
    let clock = &configuration.clock;
    let period = clock.period();
    let shown = TickPeriod::from(period);
    let (numerator, denominator) = (period.numerator_ns(), period.denominator());
    let hertz = 1_000_000_000_u128 * u128::from(denominator);
    let whole_hertz = hertz.is_multiple_of(u128::from(numerator)).then(|| hertz / u128::from(numerator));
    let value = match (denominator, whole_hertz.and_then(|hertz| u32::try_from(hertz).ok())) {
        (1, _) => format!("Period::from_ns({})", grouped(numerator)),
        (_, Some(hertz)) => format!("Period::from_hz({})", grouped(hertz.into())),
        _ => format!(
            "match Period::try_from_ratio({}, {}) {{\n    Some(period) => period,\n    None => panic!(\"a tick \
             period must be longer than zero\"),\n}}",
            grouped(numerator),
            grouped(denominator.into())
        ),
    };
    let chain = chain(
        "pub const CLOCK: TickClock",
        "TickClock::new(PERIOD)",
        &[
            format!(".tolerance_ppm({})", grouped(clock.ppm().into())),
            format!(".jitter_ns({})", grouped(clock.jitter())),
            format!(".lost({})", grouped(clock.lost_ticks().into())),
        ],
    );
    format!(
        "/// The tick period, {shown}.\npub const PERIOD: Period = {value};\n\n\
         /// The sample clock: period, tolerance, jitter of a sample instant, ticks lost in a row.\n{chain}"
    )
}

fn requirement(configuration: &Configuration) -> String {
    let required = &configuration.required;
    // The figure of a comment is rounded; it must not promise more than the constant below it.
    let (down, up) = (Rounding::Down, Rounding::Up);
    let (latency, shortest) = (&required.latency, &required.shortest);
    let (bounce, disturbance) = (&required.bounce, &required.disturbance);
    let rows = [
        ("Longest allowed delay of the report of a make", "LATENCY_MAKE", latency.make, down),
        ("Longest allowed delay of the report of a break", "LATENCY_BREAK", latency.break_, down),
        ("Shortest time open", "SHORTEST_OPEN", shortest.open, down),
        ("Shortest time closed", "SHORTEST_CLOSED", shortest.closed, down),
        ("Longest bounce after a make", "BOUNCE_MAKE", bounce.make, up),
        ("Longest bounce after a break", "BOUNCE_BREAK", bounce.break_, up),
        ("Widest disturbance that begins while open", "DISTURBANCE_OPEN", disturbance.open, up),
        ("Widest disturbance that begins while closed", "DISTURBANCE_CLOSED", disturbance.closed, up),
        ("Shortest time between two disturbances", "QUIET", required.quiet, down),
        ("Shortest settled time between a bounce and a disturbance", "CALM", required.calm, down),
    ];
    let constants = rows.map(|(doc, name, time, rounding)| {
        let doc = format!("{doc}, in nanoseconds: {}.", time.shown(rounding));
        constant(&doc, &format!("{name}_NS"), "u64", time.ns())
    });
    constants.join("\n")
}

fn envelope(configuration: &Configuration) -> String {
    let e = configuration.envelope.delivered();
    let two = |a: u32, b: u32| format!("({}, {})", grouped(a.into()), grouped(b.into()));
    let chain = chain(
        "pub const ENVELOPE: Envelope",
        &format!("Envelope::clean{}", two(e.dwell.open, e.dwell.closed)),
        &[
            format!(".bounce{}", two(e.bounce.make, e.bounce.break_)),
            format!(".glitch{}", two(e.glitch.open, e.glitch.closed)),
            format!(".quiet({})", grouped(e.quiet.into())),
            format!(".calm({})", grouped(e.calm.into())),
        ],
    );
    format!(
        "/// The waveforms that the claim is made for, in samples; lost ticks are taken off already.\n///\n\
         /// Shortest open, closed; bounce at make, break; disturbance while open, closed; quiet; calm.\n\
         {chain}"
    )
}

fn law_constants(configuration: &Configuration, law: &LawCode) -> String {
    let bounds = match configuration.proof {
        Proof::ClosedForm => {
            "match LAW.verdict(&ENVELOPE) {\n    Verdict::Holds(bounds) => bounds,\n    _ => panic!(\"the \
                              parameters of LAW do not hold inside ENVELOPE; choose them anew\"),\n}"
                .to_owned()
        }
        Proof::Explored { .. } => bounds_literal(&configuration.bounds),
    };
    format!(
        "{}\n/// The law with its parameters.\npub const LAW: {} = {};\n\n\
         /// The proved latencies, in samples: reporting on the first sample that could see it is 1.\n\
         pub const BOUNDS: Bounds = {bounds};\n",
        law.parameters, law.type_, law.new
    )
}

fn bounds_literal(bounds: &Bounds) -> String {
    let latency = |latency: Latency| {
        let fields = [("best", latency.best), ("worst", latency.worst)];
        literal("Latency", &fields.map(|(name, samples)| format!("{name}: {}", grouped(samples.into()))), 8)
    };
    let fields = [
        format!("make: {}", latency(bounds.latency.make)),
        format!("break_: {}", latency(bounds.latency.break_)),
    ];
    literal("Bounds", &[format!("latency: {}", literal("PerChange", &fields, 4))], 0)
}

fn types(configuration: &Configuration, law: &LawCode) -> String {
    let type_ = type_name(&configuration.name);
    format!(
        "/// The contact as a configuration: its law takes no room.\n\
         pub struct {type_};\n\n\
         impl Config for {type_} {{\n    type Law = {};\n    const LAW: Self::Law = LAW;\n}}\n\n\
         /// The debouncer of this contact from a known position.\n\
         pub type Debouncer = Running<ConstLaw<{type_}>>;\n\n\
         /// The debouncer of this contact from power-up, when its position is not known yet.\n\
         pub type StartingDebouncer = Running<Starting<ConstLaw<{type_}>>>;\n\n\
         /// Runs the law, settled at `position`.\n#[must_use]\n\
         pub fn debouncer(position: Position) -> Debouncer {{\n    Running::new(ConstLaw::new(), position)\n}}\n\n\
         /// Runs the law from power-up: the first settled position is no edge.\n#[must_use]\n\
         pub fn starting() -> StartingDebouncer {{\n    Running::starting(ConstLaw::new())\n}}\n",
        law.type_
    )
}

fn checks(configuration: &Configuration, law: &LawCode) -> String {
    const OUTSIDE: &str = "the clock or a time of the requirement leaves ENVELOPE; make this module anew";
    const LATE: &str = "a proved latency takes longer than the requirement allows; choose anew";
    let within = |what: &str, times: &[(&str, &str)], order: &str| {
        let conditions: Vec<String> = times
            .iter()
            .map(|(time, field)| format!("CLOCK.{what}({time}_NS) {order} ENVELOPE.{field}"))
            .collect();
        assertion(&conditions, OUTSIDE)
    };
    let touched = [
        ("BOUNCE_MAKE", "bounce.make"),
        ("BOUNCE_BREAK", "bounce.break_"),
        ("DISTURBANCE_OPEN", "glitch.open"),
        ("DISTURBANCE_CLOSED", "glitch.closed"),
    ];
    let seen = [
        ("SHORTEST_OPEN", "dwell.open"),
        ("SHORTEST_CLOSED", "dwell.closed"),
        ("QUIET", "quiet"),
        ("CALM", "calm"),
    ];
    let late = [("make", "MAKE"), ("break_", "BREAK")]
        .map(|(edge, name)| format!("CLOCK.delay_ns(BOUNDS.latency.{edge}.worst).1 <= LATENCY_{name}_NS"));
    let mut checks = vec![
        "// The build stops when an edit leaves what was required or proved.\n".to_owned()
            + &within("samples_touched", &touched, "<="),
        within("samples_seen", &seen, ">="),
    ];
    match configuration.proof {
        Proof::ClosedForm => {
            let allowed = allowed(configuration);
            checks.push(format!(
                "/// Most samples of latency that the requirement allows at a make.\n\
                 pub const ALLOWED_MAKE: u32 = {};\n\n\
                 /// Most samples of latency that the requirement allows at a break.\n\
                 pub const ALLOWED_BREAK: u32 = {};\n",
                grouped(allowed[0].into()),
                grouped(allowed[1].into())
            ));
            checks.push(assertion(
                &["LAW.verdict(&ENVELOPE)\n        .holds_within(ALLOWED_MAKE, ALLOWED_BREAK)".to_owned()],
                "the parameters of LAW no longer keep the requirement; choose them anew",
            ));
        }
        Proof::Explored { .. } => {
            let mut pins = law.pins.clone();
            pins.extend(envelope_pins(configuration));
            let bounds = configuration.bounds.latency;
            for (edge, latency) in [("make", bounds.make), ("break_", bounds.break_)] {
                pins.push(format!("BOUNDS.latency.{edge}.worst == {}", grouped(latency.worst.into())));
            }
            let message = "LAW, ENVELOPE or BOUNDS is not what was proved by exploring; prove it anew";
            checks.push(assertion(&pins, message));
        }
    }
    checks.push(assertion(&late, LATE));
    checks.join("\n")
}

fn envelope_pins(configuration: &Configuration) -> Vec<String> {
    let e = configuration.envelope.delivered();
    let fields = [
        ("dwell.open", e.dwell.open),
        ("dwell.closed", e.dwell.closed),
        ("bounce.make", e.bounce.make),
        ("bounce.break_", e.bounce.break_),
        ("glitch.open", e.glitch.open),
        ("glitch.closed", e.glitch.closed),
        ("quiet", e.quiet),
        ("calm", e.calm),
    ];
    fields.map(|(field, samples)| format!("ENVELOPE.{field} == {}", grouped(samples.into()))).to_vec()
}

/// The most samples of latency, at make and break, whose delay keeps the requirement.
fn allowed(configuration: &Configuration) -> [u32; 2] {
    let latency = &configuration.required.latency;
    [latency.make, latency.break_]
        .map(|latency| crate::requirement::allowed_samples(&configuration.clock, latency))
}
