//! The outcome as a table of 80 columns.

use std::fmt;

use super::Outcome;
use crate::estimate::Estimate;

const WIDTH: usize = 80;

impl fmt::Display for Outcome {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let rule = "─".repeat(WIDTH);
        let title = &self.experiment.settings.title;
        if !title.is_empty() {
            writeln!(f, "{title}")?;
        }
        writeln!(
            f,
            "albedra {}, {} photons, seed {}",
            env!("CARGO_PKG_VERSION"),
            self.photons(),
            self.seed()
        )?;
        writeln!(f, "fingerprint {}", self.totals.history())?;
        self.facts_lines(f)?;
        writeln!(
            f,
            "In brackets: standard uncertainty of the simulation alone, in last digits."
        )?;
        writeln!(
            f,
            "Input uncertainties not stated; this is not a measurement uncertainty."
        )?;
        writeln!(f, "{rule}")?;
        self.ledger_lines(f)?;
        writeln!(f, "{rule}")?;
        self.flux_lines(f)?;
        writeln!(f, "{rule}")?;
        self.flight_lines(f)?;
        writeln!(f, "{rule}")?;
        self.check_lines(f)
    }
}

impl Outcome {
    fn facts_lines(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let facts = self.facts();
        let medium = self.experiment.enclosure.medium();
        writeln!(
            f,
            "V {} m³, S {} m², 4V/S {} m, openings {} % of S",
            short(facts.volume),
            short(facts.area),
            short(facts.mean_chord),
            short(100.0 * facts.opening_fraction),
        )?;
        let gain = 1.0 / (1.0 - facts.mean_reflectance);
        writeln!(
            f,
            "mean reflectance {}, amplification 1/(1 − ρ) {}",
            short(facts.mean_reflectance),
            short(gain),
        )?;
        writeln!(
            f,
            "group index {}, absorption {} /m",
            medium.group_index(),
            medium.absorption(),
        )
    }

    fn ledger_lines(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let ledger = self.ledger();
        writeln!(f, "{:<14}{:>26}{:>12}", "ledger", "W", "%")?;
        writeln!(
            f,
            "{:<14}{:>26}{:>12}",
            "emitted",
            short(ledger.emitted),
            "100"
        )?;
        let lines = [
            ("absorbed", ledger.absorbed),
            ("escaped", ledger.escaped),
            ("medium", ledger.medium),
            ("cut", ledger.cut),
            ("untracked", ledger.untracked),
            ("roulette", ledger.roulette),
        ];
        for (name, estimate) in lines {
            let percent = share(100.0 * estimate.value / ledger.emitted);
            writeln!(f, "{name:<14}{:>26}{percent:>12}", estimate.to_string())?;
        }
        let closes = if ledger.closes() {
            "closes to the last integer"
        } else {
            "DOES NOT CLOSE"
        };
        writeln!(f, "{:<14}{closes:>26}", "")
    }

    fn flux_lines(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        writeln!(
            f,
            "{:<14}{:>17}{:>16}{:>17}{:>16}",
            "flux in W", "incident", "direct", "absorbed", "escaped"
        )?;
        for (row, flux) in self.rows().iter().zip(self.fluxes()) {
            // A long name has a line of its own.
            let long = row.name.chars().count() > 13;
            if long {
                writeln!(f, "{}", row.name.chars().take(WIDTH).collect::<String>())?;
            }
            let name = if long { "" } else { row.name.as_str() };
            let [incident, direct, absorbed, escaped] =
                [flux.incident, flux.direct, flux.absorbed, flux.escaped].map(compact);
            let (absorbed, escaped) = if row.is_opening() {
                ("–".to_owned(), escaped)
            } else {
                (absorbed, "–".to_owned())
            };
            writeln!(
                f,
                "{name:<14}{incident:>17}{direct:>16}{absorbed:>17}{escaped:>16}"
            )?;
        }
        Ok(())
    }

    fn flight_lines(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut line = |name: &str, estimate: Estimate, unit: &str| {
            let text = format!("{name:<28}{:>28} {unit}", estimate.to_string());
            writeln!(f, "{}", text.trim_end())
        };
        line("mean free path", self.mean_free_path(), "m")?;
        line("mean strikes", self.mean_strikes(), "")?;
        line("mean path", self.mean_path(), "m")?;
        line("stored energy", self.stored_energy(), "J")?;
        if let Some(time) = self.decay_time(None) {
            line("decay time", time.estimate, "s")?;
            let (from, to) = time.window;
            let flag = if time.not_one_exponential {
                "NOT ONE EXPONENTIAL"
            } else {
                "one exponential"
            };
            writeln!(
                f,
                "    fitted from {} to {} s: {flag}",
                short(from),
                short(to)
            )?;
        }
        Ok(())
    }

    fn check_lines(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let facts = self.facts();
        let free = self.mean_free_path();
        let ratio = free.scaled(1.0 / facts.mean_chord);
        let verdict = if !facts.mean_chord_must_hold {
            "for orientation".to_owned()
        } else if free.u.is_infinite() {
            "too few photons to check".to_owned()
        } else {
            let zeta = free.zeta(facts.mean_chord, 0.0);
            let held = free.p_value(facts.mean_chord, 0.0) >= LEAST_P;
            format!("zeta {zeta:+.2}: {}", if held { "holds" } else { "FAILS" })
        };
        writeln!(f, "mean free path / (4V/S) {ratio} {verdict}")?;
        let counters = self.counters();
        writeln!(
            f,
            "{} strikes, {} tried again, {} untracked",
            counters.strikes, counters.retried, counters.untracked
        )?;
        if let Some(target) = &self.target {
            let verdict = if target.met() { "met" } else { "NOT MET" };
            writeln!(
                f,
                "target {}: relative uncertainty {:.2e} wanted, {:.2e} reached: {verdict}",
                target.output, target.relative, target.reached
            )?;
        }
        if self.ledger().cut.value > 0.0 {
            writeln!(
                f,
                "cut: light that a limit ended; what it would have done later is missing above"
            )?;
        }
        write!(
            f,
            "An estimate for design, not a hazard assessment: see IEC 60825-1 and IEC 62471."
        )
    }
}

/// A check fails below this chance of so large a deviation.
const LEAST_P: f64 = 7e-6;

/// An estimate for a narrow column.
fn compact(estimate: Estimate) -> String {
    let text = estimate.to_string();
    if text.starts_with('<') {
        text
    } else {
        text.replace(' ', "")
    }
}

/// A percentage to four decimals, never a negative zero.
fn share(percent: f64) -> String {
    let text = format!("{percent:.4}");
    if text == "-0.0000" {
        "0.0000".to_owned()
    } else {
        text
    }
}

/// A known number in at most six digits.
fn short(x: f64) -> String {
    if x == 0.0 || (x.abs() >= 1e-3 && x.abs() < 1e6) {
        let text = format!("{x:.6}");
        return text.trim_end_matches('0').trim_end_matches('.').to_owned();
    }
    format!("{x:.4e}")
}
