//! What stands for a train, in plain words with numbers, and the advice that goes with it.

use super::reason::{action_words, baseline_words, no_dates_words, reasons_words};
use super::time::{dates_words, day_words, duration_words, moment_words};
use super::train_view::{TrainCase, reading, shown};
use super::units::Units;
use crate::advice::{Action, Recommendation};
use crate::analysis::{Dates, GrowthFrom, LimitKind, NoDates, Standing, Verdict};
use crate::base::Instant;

/// What is advised.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Advice<'a> {
    /// What an open recommendation says.
    Open(&'a Recommendation),
    /// The limits are known, or read, to be far.
    NoCleanNeeded,
    /// Data are missing or too old, or nothing can be told from them.
    CannotAdvise,
}

/// The advice for a train. It is never "no clean needed" unless readings say so.
pub fn advice<'a>(case: &TrainCase<'a>) -> Advice<'a> {
    let Some(standing) = case.standing.filter(|_| !case.is_stale()) else {
        return Advice::CannotAdvise;
    };
    if let Some(r) = leading(case.open) {
        return Advice::Open(r);
    }
    let known = match standing.no_dates {
        None => !near(case, standing),
        Some(NoDates::YoungRun) => {
            let read = standing.loss.is_some() || standing.end_tmp_pa.is_some();
            standing.run_start.is_some() && read
        }
        Some(_) => false,
    };
    if known && exceeded(standing).is_none() { Advice::NoCleanNeeded } else { Advice::CannotAdvise }
}

/// The open recommendation that speaks for a train: the most urgent one.
fn leading(open: &[Recommendation]) -> Option<&Recommendation> {
    open.iter().filter(|r| r.is_open()).min_by_key(|r| (std::cmp::Reverse(r.urgency), r.action))
}

fn clean_kinds() -> impl Iterator<Item = LimitKind> {
    LimitKind::ALL.into_iter().filter(|k| k.is_clean())
}

/// Whether the early date of a clean limit falls within the planning horizon.
fn near(case: &TrainCase, standing: &Standing) -> bool {
    let horizon = standing.as_of.plus(case.site.train.limits.planning_horizon_us);
    clean_kinds().any(|k| standing.dates_of(k).and_then(|d| d.p10).is_some_and(|t| t <= horizon))
}

/// The clean limit that is exceeded now, whether it counts already or not.
fn exceeded(standing: &Standing) -> Option<LimitKind> {
    let held = clean_kinds().find(|k| standing.hold(*k).held.is_some());
    held.or_else(|| clean_kinds().find(|k| standing.hold(*k).since.is_some()))
}

/// Whether a clean limit is past, and has not been for long enough to count.
fn pending(standing: &Standing) -> bool {
    exceeded(standing).is_some_and(|k| standing.hold(k).held.is_none())
}

/// What stands for a train, in plain words.
pub fn sentence(units: &Units, case: &TrainCase) -> String {
    let Some(standing) = case.standing else {
        return "Cannot advise: no reading of this train has been worked yet; post an export that \
                holds its tags."
            .to_owned();
    };
    let told = Told { units, case, standing };
    let advice = advice(case);
    let body = told.body(&advice);
    if !case.is_stale() {
        return body;
    }
    let newest = case.newest().unwrap_or(standing.as_of);
    format!(
        "Cannot advise: the newest reading is {} old, of {}. As of {}: {body}",
        duration_words(case.age_us().unwrap_or(0)),
        told.moment(newest),
        told.moment(standing.as_of),
    )
}

/// A sentence in the making.
struct Told<'a> {
    units: &'a Units,
    case: &'a TrainCase<'a>,
    standing: &'a Standing,
}

impl Told<'_> {
    fn moment(&self, at: Instant) -> String {
        moment_words(&self.case.plant.zone, at, self.case.wall)
    }

    fn day(&self, at: Instant) -> String {
        day_words(&self.case.plant.zone, at, self.case.wall)
    }

    /// Everything but the age of the data.
    fn body(&self, advice: &Advice) -> String {
        let mut sentences = Vec::new();
        match self.standing.in_clean {
            Some(since) => sentences.push(format!(
                "Being cleaned since {}; its limits are looked at again once it has filtered.",
                self.moment(since)
            )),
            None => sentences.push(self.main(advice)),
        }
        sentences.extend(self.poor_clean());
        sentences.extend(self.why_no_advice(advice));
        let others = self.case.open.iter().filter(|r| r.is_open());
        for r in others.filter(|r| r.action != Action::CleanInPlace) {
            sentences.push(action_words(r.action).to_owned());
        }
        if !self.standing.troubles.is_empty() {
            let reasons = reasons_words(&self.standing.troubles);
            sentences.push(format!("In the last day hours could not be used: {reasons}"));
        }
        if !self.case.unknown_codes.is_empty() {
            sentences.push(format!(
                "The state read {}, which the plant file does not name: those minutes count as nothing.",
                self.case.unknown_codes.join(", ")
            ));
        }
        sentences.join(" ")
    }

    /// What the last clean was worth, where it was less than hoped.
    fn poor_clean(&self) -> Option<String> {
        let run = self.standing.clean.as_ref()?;
        let what = match run.verdict {
            Verdict::PartlyRestored => "restored it in part",
            Verdict::NotRestored => "did not restore it",
            Verdict::Doubtful => "is doubtful",
            Verdict::Restored | Verdict::CannotTellYet => return None,
        };
        let best = self.units.share.text(run.restored_share()?);
        let regained = run.regained_share().map_or_else(String::new, |share| {
            format!(", {} of the loss regained", self.units.share.text(share))
        });
        let against = baseline_words(run.best?.kind);
        Some(format!(
            "The clean that ended {} {what}: {best} of {against}{regained}.",
            self.day(run.start)
        ))
    }

    /// Loss, limit and what follows from them.
    fn main(&self, advice: &Advice) -> String {
        let mut parts = vec![self.loss()];
        parts.extend(self.tmp());
        parts.extend(self.limits());
        let text = parts.join("; ");
        match self.conclusion(advice) {
            Some(c) => format!("{text}: {c}."),
            None => format!("{text}."),
        }
    }

    fn loss(&self) -> String {
        let Some(baseline) = self.standing.baseline else {
            return "Loss of permeability cannot be told without a baseline".to_owned();
        };
        let Some(loss) = self.standing.loss else {
            return "Loss of permeability is not known now, for no start of a cycle was seen in \
                    the last day"
                .to_owned();
        };
        let against = format!(
            "against {} (baseline {})",
            baseline_words(baseline.kind),
            self.units.permeability.text(self.case.site.permeability(baseline.resistance_1_m))
        );
        // Half of the last figure shown.
        if loss.share.abs() < 5e-4 {
            return format!("Permeability is unchanged {against}");
        }
        let share = self.units.share.text(loss.share.abs());
        if loss.share < 0.0 {
            format!("Permeability is {share} up {against}")
        } else {
            format!("Lost {share} of permeability {against}")
        }
    }

    /// TMP is told where it is what limits, or all that is known.
    fn tmp(&self) -> Option<String> {
        let (pa, _) = self.standing.end_tmp_pa?;
        let binds = self.standing.binding().is_some_and(|(k, _)| k.is_tmp());
        let over = exceeded(self.standing).is_some_and(LimitKind::is_tmp);
        (binds || over || self.standing.loss.is_none())
            .then(|| format!("TMP at the end of a cycle is {}", self.units.tmp.text(pa)))
    }

    fn limit_name(&self, kind: LimitKind) -> String {
        let name = match kind {
            LimitKind::LossAdvisory => "advisory limit",
            LimitKind::LossClean => "clean limit",
            LimitKind::TmpAdvisory => "advisory limit of TMP",
            LimitKind::TmpClean => "clean limit of TMP",
        };
        match kind.value(&self.case.site.train.limits) {
            Some(v) => format!("{name} ({})", shown(self.units, kind).text(v)),
            None => name.to_owned(),
        }
    }

    fn limits(&self) -> Vec<String> {
        if let Some(kind) = exceeded(self.standing) {
            let hold = self.standing.hold(kind);
            let since =
                hold.since.map_or_else(String::new, |t| format!(" since {}", self.moment(t)));
            let yet = if hold.held.is_some() { "" } else { ", not yet long enough to count" };
            return vec![format!("past the {}{since}{yet}", self.limit_name(kind))];
        }
        let mut out = Vec::new();
        let advisory = LimitKind::ALL
            .into_iter()
            .find(|k| !k.is_clean() && self.standing.hold(*k).held.is_some());
        if let Some(kind) = advisory {
            let since = self.standing.hold(kind).since.map(|t| self.day(t)).unwrap_or_default();
            out.push(format!("past the {} since {since}", self.limit_name(kind)));
        }
        match (self.standing.no_dates, self.standing.binding()) {
            (Some(_), _) if clean_kinds().any(|k| reading(self.standing, k).is_some()) => {
                out.push("limits have not been reached".to_owned());
            }
            (Some(_), _) => {}
            (None, Some((kind, dates))) => out.push(self.ahead(kind, &dates)),
            (None, None) => out.push("no clean limit is likely within 180 days".to_owned()),
        }
        out
    }

    fn ahead(&self, kind: LimitKind, dates: &Dates) -> String {
        let (zone, now) = (&self.case.plant.zone, self.standing.as_of);
        let borrowed = match self.standing.growth_from {
            Some(GrowthFrom::EarlierRuns) => {
                ", by the rate of earlier runs, for this one is too young to tell its own"
            }
            _ => "",
        };
        let dates = dates_words(zone, dates, now, self.case.wall);
        format!("{} {dates}{borrowed}", self.limit_name(kind))
    }

    fn conclusion(&self, advice: &Advice) -> Option<String> {
        let clean = self.case.open.iter().find(|r| r.is_open() && r.action == Action::CleanInPlace);
        if let Some(r) = clean {
            return Some(self.start(r));
        }
        match advice {
            Advice::NoCleanNeeded => Some("no clean needed now".to_owned()),
            _ => None,
        }
    }

    fn start(&self, r: &Recommendation) -> String {
        let silent = match r.silent_until.filter(|t| *t > self.case.wall) {
            Some(t) => format!(" (deferred until {})", self.moment(t)),
            None => String::new(),
        };
        match r.start_by {
            Some(t) if t > self.case.wall => {
                format!("start the clean by {}{silent}", self.moment(t))
            }
            // A limit that is past leaves no latest start to be blamed for.
            Some(_) if exceeded(self.standing).is_some() => {
                format!("clean it as soon as a window, the crew and the other trains allow{silent}")
            }
            Some(t) => {
                format!("start the clean now, the latest start was {}{silent}", self.moment(t))
            }
            None => format!("start the clean now{silent}"),
        }
    }

    /// Why there is no advice, or no date, where there is none.
    fn why_no_advice(&self, advice: &Advice) -> Option<String> {
        if self.case.is_stale() {
            return None;
        }
        match (advice, self.standing.no_dates) {
            // The first sentence says so already.
            (_, Some(NoDates::InClean)) => None,
            (Advice::CannotAdvise, _) if pending(self.standing) => Some(
                "Cannot advise yet: the limit counts once it has been past for the whole on-delay."
                    .to_owned(),
            ),
            (Advice::CannotAdvise, Some(why)) => {
                Some(format!("Cannot advise: {}.", no_dates_words(why)))
            }
            (Advice::CannotAdvise, None) => Some(
                "Cannot advise: no recommendation to clean is open; see whether it was declined."
                    .to_owned(),
            ),
            (_, Some(why)) => Some(format!(
                "It cannot be told yet when limits will be reached, because {}.",
                no_dates_words(why)
            )),
            (_, None) => None,
        }
    }
}
