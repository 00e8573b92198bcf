//! Outputs by name.

use crate::engine::Cause;
use crate::estimate::{Estimate, Jackknife, Sums, Totals};
use crate::experiment::{ExperimentError, Layout};
use crate::near::Near;
use crate::observe::{FlightMoments, FluxRows, LossLedger};

/// An output that is a single number.
#[derive(Debug)]
pub(crate) struct Named<'a> {
    layout: &'a Layout,
    kind: Kind,
}

/// What it is.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Kind {
    Row(usize, RowKind),
    Ledger(LedgerKind),
    MeanFreePath,
    MeanStrikes,
    MeanPath,
    StoredEnergy,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum RowKind {
    Incident,
    Direct,
    Absorbed,
    Reflected,
    Escaped,
    Irradiance,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum LedgerKind {
    Emitted,
    Absorbed,
    Escaped,
    Loss(Cause),
}

const ROW_KINDS: [(&str, RowKind); 6] = [
    ("incident", RowKind::Incident),
    ("direct", RowKind::Direct),
    ("absorbed", RowKind::Absorbed),
    ("reflected", RowKind::Reflected),
    ("escaped", RowKind::Escaped),
    ("irradiance", RowKind::Irradiance),
];

const LEDGER_KINDS: [(&str, LedgerKind); 7] = [
    ("emitted", LedgerKind::Emitted),
    ("absorbed", LedgerKind::Absorbed),
    ("escaped", LedgerKind::Escaped),
    ("medium", LedgerKind::Loss(Cause::Medium)),
    ("cut", LedgerKind::Loss(Cause::Cut)),
    ("untracked", LedgerKind::Loss(Cause::Untracked)),
    ("roulette", LedgerKind::Loss(Cause::Roulette)),
];

const SINGLE: [(&str, Kind); 4] = [
    ("mean_free_path", Kind::MeanFreePath),
    ("mean_strikes", Kind::MeanStrikes),
    ("mean_path", Kind::MeanPath),
    ("stored_energy", Kind::StoredEnergy),
];

impl Layout {
    /// The output of this name.
    pub(crate) fn named(&self, name: &str) -> Result<Named<'_>, ExperimentError> {
        let find = || {
            if let Some(&(_, kind)) = SINGLE.iter().find(|(single, _)| *single == name) {
                return Some(kind);
            }
            let (row, kind) = name.rsplit_once('.')?;
            if let Some(index) = self.rows.iter().position(|candidate| candidate.name == row) {
                return ROW_KINDS
                    .iter()
                    .find(|(text, _)| *text == kind)
                    .map(|&(_, kind)| Kind::Row(index, kind));
            }
            let (_, kind) = LEDGER_KINDS
                .iter()
                .find(|(text, _)| row == "ledger" && *text == kind)?;
            Some(Kind::Ledger(*kind))
        };
        match find() {
            Some(kind) => Ok(Named { layout: self, kind }),
            None => Err(ExperimentError::UnknownOutput {
                name: name.to_owned(),
                near: Near::to(name, self.output_names().iter().map(String::as_str)),
            }),
        }
    }

    /// Whether there is an output of this name.
    pub(crate) fn known(&self, name: &str) -> Result<(), ExperimentError> {
        self.named(name).map(|_| ())
    }

    pub(crate) fn output_names(&self) -> Vec<String> {
        let rows = self.rows.iter().flat_map(|row| {
            ROW_KINDS
                .iter()
                .map(|(kind, _)| format!("{}.{kind}", row.name))
        });
        let ledger = LEDGER_KINDS
            .iter()
            .map(|(kind, _)| format!("ledger.{kind}"));
        rows.chain(ledger)
            .chain(SINGLE.iter().map(|(name, _)| (*name).to_owned()))
            .collect()
    }

    /// Relative standard uncertainty of an output; infinite if it does not exist or has none.
    pub(crate) fn relative_uncertainty(&self, totals: &Totals, output: &str) -> f64 {
        let Ok(named) = self.named(output) else {
            return f64::INFINITY;
        };
        let estimate = named.estimate(&totals.jackknife(&self.exponents));
        let relative = estimate.u / estimate.value.abs();
        if relative.is_nan() {
            f64::INFINITY
        } else {
            relative
        }
    }

    /// Named output of a row, without a look at its name.
    pub(crate) fn of_row(&self, row: usize, kind: RowKind) -> Named<'_> {
        Named {
            layout: self,
            kind: Kind::Row(row, kind),
        }
    }

    pub(crate) fn of_ledger(&self, kind: LedgerKind) -> Named<'_> {
        Named {
            layout: self,
            kind: Kind::Ledger(kind),
        }
    }
}

impl Named<'_> {
    /// The value for a set of photons, in the output's unit.
    pub(crate) fn value(&self, sums: &Sums<'_>) -> f64 {
        let layout = self.layout;
        let flights = |cell: usize| sums.mean(layout.flights_at + cell);
        let unit = layout.flights.unit;
        match self.kind {
            Kind::Row(row, kind) => self.row_value(sums, row, kind),
            Kind::Ledger(LedgerKind::Emitted) => layout.watts,
            Kind::Ledger(LedgerKind::Loss(cause)) => {
                layout.watts * sums.mean(layout.losses_at + LossLedger::cell(cause))
            }
            Kind::Ledger(kind) => {
                let openings = kind == LedgerKind::Escaped;
                let lost = layout
                    .rows
                    .iter()
                    .enumerate()
                    .filter(|(_, row)| row.is_opening() == openings);
                let cells: Vec<usize> = lost
                    .map(|(row, _)| layout.rows_at + FluxRows::lost(row))
                    .collect();
                layout.watts * mean_of(sums, &cells)
            }
            Kind::MeanFreePath => {
                unit * flights(FlightMoments::from_surface(1))
                    / flights(FlightMoments::from_surface(0))
            }
            Kind::MeanStrikes => {
                let cells: Vec<usize> = (0..layout.rows.len())
                    .map(|row| layout.rows_at + FluxRows::incident(row))
                    .collect();
                mean_of(sums, &cells)
            }
            Kind::MeanPath => unit * flights(FlightMoments::PATH),
            Kind::StoredEnergy => layout.watts * unit * flights(FlightMoments::PATH) / layout.speed,
        }
    }

    fn row_value(&self, sums: &Sums<'_>, row: usize, kind: RowKind) -> f64 {
        let layout = self.layout;
        let mean = |cell: usize| layout.watts * sums.mean(layout.rows_at + cell);
        let opening = layout.rows[row].is_opening();
        match kind {
            RowKind::Incident => mean(FluxRows::incident(row)),
            RowKind::Direct => mean(FluxRows::direct(row)),
            RowKind::Irradiance => mean(FluxRows::incident(row)) / layout.rows[row].area,
            RowKind::Absorbed => {
                if opening {
                    0.0
                } else {
                    mean(FluxRows::lost(row))
                }
            }
            RowKind::Escaped => {
                if opening {
                    mean(FluxRows::lost(row))
                } else {
                    0.0
                }
            }
            RowKind::Reflected => {
                let quanta = |cell| sums.quanta(layout.rows_at + cell);
                let reflected = quanta(FluxRows::incident(row))
                    .zip(quanta(FluxRows::lost(row)))
                    .and_then(|(incident, lost)| incident.checked_sub(lost));
                reflected.map_or(f64::NAN, |quanta| layout.watts * per_photon(sums, quanta))
            }
        }
    }

    /// The estimate for all photons; bias-corrected where the output is not linear.
    pub(crate) fn estimate(&self, jackknife: &Jackknife<'_>) -> Estimate {
        if self.kind == Kind::MeanFreePath {
            return jackknife.estimate(|sums| self.value(sums));
        }
        let estimate = jackknife.estimate_linear(|sums| self.value(sums));
        let Kind::Row(row, kind) = self.kind else {
            return estimate;
        };
        let layout = self.layout;
        let (cell, scale) = match kind {
            RowKind::Incident => (FluxRows::incident(row), 1.0),
            RowKind::Irradiance => (FluxRows::incident(row), 1.0 / layout.rows[row].area),
            RowKind::Direct => (FluxRows::direct(row), 1.0),
            RowKind::Absorbed | RowKind::Escaped => (FluxRows::lost(row), 1.0),
            RowKind::Reflected => return estimate,
        };
        // What cannot be by construction is 0, without a limit.
        let impossible = match kind {
            RowKind::Absorbed => layout.rows[row]
                .coating
                .is_none_or(|coating| coating.reflectance() == 1.0),
            RowKind::Escaped => !layout.rows[row].is_opening(),
            _ => false,
        };
        if impossible {
            return estimate;
        }
        let upper = jackknife.upper_limit(layout.rows_at + cell, 1.0);
        estimate.with_upper(upper.map(|share| share * layout.watts * scale))
    }
}

/// A number of quanta as a share of the photons' energy.
pub(crate) fn per_photon(sums: &Sums<'_>, quanta: i128) -> f64 {
    quanta as f64 * (1.0 / crate::math::ONE as f64) / sums.photons() as f64
}

/// Sum of cells over the photons, exact up to the last conversion.
fn mean_of(sums: &Sums<'_>, cells: &[usize]) -> f64 {
    let quanta: Option<i128> = cells
        .iter()
        .try_fold(0_i128, |sum, &cell| sum.checked_add(sums.quanta(cell)?));
    quanta.map_or(f64::NAN, |quanta| per_photon(sums, quanta))
}
