//! One train: `R = membrane + irrecoverable + chemical + reversible`, `TMP = mu R J`, and the
//! clockwork of cycles, backwashes, cleans and tests that moves it.

use super::clean::CleanStep;
use super::fault::Fault;
use super::recipe::{Recipe, Routine, TrainRecipe};
use super::rng::{Rng, Wander};
use super::truth::{CleanTruth, Crossing, TrainTruth, Watches};
use crate::base::{DAY_US, Instant, SECOND_US};
use crate::plant::Phase;

/// Least share of the best permeability after a clean that counts as restored (common
/// practice, no source).
pub(super) const RESTORED_SHARE: f64 = 0.95;

/// Seconds in which flow and surplus pressure settle after a valve has opened.
const FLOW_SETTLES_S: f64 = 20.0;
const PRESSURE_SETTLES_S: f64 = 25.0;
/// Surplus pressure at the first moment, as a share: air is purged and pumps ramp.
const PRESSURE_SURPLUS: f64 = 0.15;
/// After so many seconds both are taken as settled.
const SETTLED_S: f64 = 300.0;

/// What all trains meet in one minute.
#[derive(Clone, Copy, Debug)]
pub(super) struct Site {
    pub(super) routine: Routine,
    pub(super) temperature_degc: f64,
    pub(super) viscosity_pa_s: f64,
    /// Flux asked of a train in service, m/s.
    pub(super) flux_m_s: f64,
    /// Flux to which rates refer, m/s.
    pub(super) flux_reference_m_s: f64,
    /// Factor on the fouling rate that the feed brings.
    pub(super) rate_factor: f64,
    /// Factor on what a cycle lays down.
    pub(super) alpha_factor: f64,
    /// What a backwash takes off, where the feed decides it.
    pub(super) washed_back: Option<f64>,
}

/// What has happened so far.
#[derive(Clone, Debug, Default)]
pub(super) struct Events {
    pub(super) crossings: Vec<Crossing>,
    pub(super) cleans: Vec<CleanTruth>,
}

#[derive(Clone, Debug)]
pub(super) struct Train {
    at: Instant,
    phase: Phase,
    phase_from: Instant,
    phase_to: Instant,
    /// Flux asked of it, after the controller's lag, m/s.
    flux_set_m_s: f64,
    area_lost_m2: f64,
    r_irrecoverable: f64,
    r_chemical: f64,
    /// Part of `r_chemical` that grew since the last chemical backwash.
    r_fresh: f64,
    r_reversible: f64,
    cycle_volume_m: f64,
    start_of_cycle: f64,
    baseline: f64,
    best: f64,
    clean_next: usize,
    clean_step: usize,
    clean_from: Instant,
    clean_r_chemical: f64,
    clean_before: f64,
    standby_next: usize,
    chemical_due: Instant,
    test_due: Instant,
    day: i64,
    day_factor: f64,
    start: Instant,
    wander: Wander,
    rng: Rng,
    watches: Watches,
}

impl Train {
    /// The train at the plant's start; `number` of `count` puts it out of step with the others.
    pub(super) fn new(recipe: &Recipe, train: &TrainRecipe, number: usize, streams: u64) -> Self {
        let (start, count) = (recipe.start, recipe.trains.len().max(1));
        let share = number as f64 / count as f64;
        let routine = &recipe.routine;
        let into = (share * routine.cycle_us as f64) as i64 / SECOND_US * SECOND_US;
        // Spread over 16 hours from three hours after the start, so that nobody is asked to
        // watch eight chemical backwashes at once.
        let due = |hours: f64| start.plus(((hours + 16.0 * share) * 3600.0) as i64 * SECOND_US);
        let resistance =
            train.r_membrane_per_m + train.r_irrecoverable_per_m + train.r_chemical_per_m;
        Self {
            at: start,
            phase: Phase::Filtration,
            phase_from: start,
            phase_to: start.plus(routine.cycle_us - into),
            flux_set_m_s: recipe.flux_at(start),
            area_lost_m2: 0.0,
            r_irrecoverable: train.r_irrecoverable_per_m,
            r_chemical: train.r_chemical_per_m,
            r_fresh: 0.0,
            r_reversible: 0.0,
            cycle_volume_m: 0.0,
            start_of_cycle: resistance,
            baseline: train.after_clean_per_m,
            best: train.after_clean_per_m,
            clean_next: train.cleans.iter().filter(|c| c.start < start).count(),
            clean_step: 0,
            clean_from: start,
            clean_r_chemical: 0.0,
            clean_before: resistance,
            standby_next: train.standby.iter().filter(|s| s.from < start).count(),
            chemical_due: due(3.0),
            test_due: due(4.5),
            day: -1,
            day_factor: 1.0,
            start,
            wander: Wander::new(Rng::stream(recipe.seed, streams), train.wander_sd),
            rng: Rng::stream(recipe.seed, streams + 1),
            watches: Watches::new(&recipe.limits),
        }
    }

    /// Whether it counts on to make its share of the plant's flow. Backwashes and tests do not
    /// take it off: the clearwell carries those.
    pub(super) fn in_service(&self) -> bool {
        !matches!(self.phase, Phase::CleanInPlace | Phase::Standby)
    }

    /// Seconds since the phase began.
    pub(super) fn phase_age_s(&self) -> f64 {
        self.at.seconds_since(self.phase_from)
    }

    /// Moves on to a moment, through all that happens on the way.
    pub(super) fn advance(
        &mut self,
        recipe: &TrainRecipe,
        site: &Site,
        to: Instant,
        events: &mut Events,
    ) {
        self.start_minute(recipe, site, to);
        loop {
            let event = self.next_event(recipe);
            if event > to {
                self.filter(recipe, site, to);
                return;
            }
            self.filter(recipe, site, event);
            self.turn(recipe, site, events);
        }
    }

    fn start_minute(&mut self, recipe: &TrainRecipe, site: &Site, to: Instant) {
        let missing = site.flux_m_s - self.flux_set_m_s;
        let close = missing.abs() < 1e-4 * site.flux_m_s;
        self.flux_set_m_s += if close { missing } else { 0.5 * missing };
        let day = self.at.since(self.start).div_euclid(DAY_US);
        if day > self.day {
            self.day = day;
            self.day_factor = self.wander.factor(day);
        }
        for fault in &recipe.faults {
            match *fault {
                Fault::AreaLost(at, area) if self.at <= at && at < to => self.area_lost_m2 += area,
                Fault::Clogged(at, r) if self.at <= at && at < to => self.r_irrecoverable += r,
                _ => {}
            }
        }
    }

    /// When something happens next; never before now.
    fn next_event(&self, recipe: &TrainRecipe) -> Instant {
        let mut event = self.phase_to;
        if self.in_service() {
            let clean = recipe.cleans.get(self.clean_next).map(|c| c.start);
            let standby = recipe.standby.get(self.standby_next).map(|s| s.from);
            event = [clean, standby].into_iter().flatten().fold(event, Instant::min);
        }
        event.max(self.at)
    }

    /// Lays down what is laid down until `to`.
    fn filter(&mut self, recipe: &TrainRecipe, site: &Site, to: Instant) {
        let from = std::mem::replace(&mut self.at, to);
        if self.phase != Phase::Filtration || to <= from {
            return;
        }
        let seconds = to.seconds_since(from);
        let flux = self.flux_full(recipe);
        let left = |at: Instant| settling(at.seconds_since(self.phase_from), FLOW_SETTLES_S);
        let volume = flux * (seconds - FLOW_SETTLES_S * (left(from) - left(to)));
        self.cycle_volume_m += volume;
        self.r_reversible += recipe.alpha_per_m2 * site.alpha_factor * volume;

        let routine = &site.routine;
        let kept = match routine.chemical_backwash {
            Some(_) => (1.0 - routine.chemical_backwash_share).max(0.01),
            None => 1.0,
        };
        let cold = 1.0 + recipe.cold_effect * (20.0 - site.temperature_degc) / 15.0;
        let rise = flux / site.flux_reference_m_s - 1.0;
        let pushed =
            if recipe.flux_effect == 0.0 { 1.0 } else { libm::exp(recipe.flux_effect * rise) };
        let factor = self.day_factor * site.rate_factor * cold.max(0.0) * pushed;
        let grown = recipe.rate_per_m_day / kept * factor * seconds / 86_400.0;
        self.r_chemical += grown;
        self.r_fresh += grown;
    }

    /// What happens now that the phase has ended or something is due.
    fn turn(&mut self, recipe: &TrainRecipe, site: &Site, events: &mut Events) {
        let routine = &site.routine;
        let at = self.at;
        if self.in_service() {
            if recipe.cleans.get(self.clean_next).is_some_and(|c| c.start <= at) {
                return self.begin_clean(recipe);
            }
            if let Some(span) = recipe.standby.get(self.standby_next).filter(|s| s.from <= at) {
                self.standby_next += 1;
                return self.enter(Phase::Standby, span.to.since(at));
            }
        }
        match self.phase {
            Phase::Filtration => {
                self.end_cycle(recipe, site, events);
                match routine.chemical_backwash {
                    Some((every, takes)) if self.chemical_due <= at => {
                        self.chemical_due = next_due(self.chemical_due, every, at);
                        self.enter(Phase::ChemicalBackwash, takes);
                    }
                    _ => self.enter(Phase::Backwash, routine.backwash_us),
                }
            }
            Phase::Backwash | Phase::ChemicalBackwash => {
                let (low, high) = routine.washed_back;
                let share = self.rng.between(low, high);
                self.r_reversible *= 1.0 - site.washed_back.unwrap_or(share);
                if self.phase == Phase::ChemicalBackwash {
                    self.r_chemical -= routine.chemical_backwash_share * self.r_fresh;
                    self.r_fresh = 0.0;
                }
                match routine.integrity_test {
                    Some((every, takes)) if self.test_due <= at => {
                        self.test_due = next_due(self.test_due, every, at);
                        self.enter(Phase::IntegrityTest, takes);
                    }
                    _ => self.begin_cycle(recipe, routine),
                }
            }
            Phase::Standby => self.enter(Phase::Backwash, routine.backwash_us),
            Phase::CleanInPlace => self.end_step(recipe, routine, events),
            _ => self.begin_cycle(recipe, routine),
        }
    }

    fn enter(&mut self, phase: Phase, lasts_us: i64) {
        self.phase = phase;
        self.phase_from = self.at;
        self.phase_to = self.at.plus(lasts_us.max(SECOND_US));
    }

    fn begin_cycle(&mut self, recipe: &TrainRecipe, routine: &Routine) {
        self.cycle_volume_m = 0.0;
        self.start_of_cycle = self.resistance(recipe);
        self.enter(Phase::Filtration, routine.cycle_us);
    }

    fn end_cycle(&mut self, recipe: &TrainRecipe, site: &Site, events: &mut Events) {
        let loss = 1.0 - self.baseline / self.start_of_cycle;
        let tmp = site.viscosity_pa_s * self.flux_full(recipe) * self.resistance(recipe)
            + recipe.tmp_offset_pa;
        let lasted = self.at.since(self.phase_from);
        self.watches.cycle(&recipe.id, self.at, lasted, loss, tmp, &mut events.crossings);
    }

    fn begin_clean(&mut self, recipe: &TrainRecipe) {
        self.clean_step = 0;
        self.clean_from = self.at;
        self.clean_r_chemical = self.r_chemical;
        self.clean_before = self.start_of_cycle;
        let first = clean_step(recipe, self.clean_next, 0).map_or(0, CleanStep::duration_us);
        self.enter(Phase::CleanInPlace, first);
    }

    fn end_step(&mut self, recipe: &TrainRecipe, routine: &Routine, events: &mut Events) {
        if let Some(step) = clean_step(recipe, self.clean_next, self.clean_step) {
            self.r_chemical -= step.removes * self.clean_r_chemical;
            self.r_chemical = self.r_chemical.max(0.0);
        }
        self.clean_step += 1;
        if let Some(step) = clean_step(recipe, self.clean_next, self.clean_step) {
            return self.enter(Phase::CleanInPlace, step.duration_us());
        }
        let left = recipe.cleans.get(self.clean_next).map_or(0.0, |c| c.irrecoverable_per_m);
        self.r_irrecoverable += left;
        self.r_reversible = 0.0;
        self.r_fresh = 0.0;
        self.clean_next += 1;
        let after = self.resistance(recipe);
        self.best = self.best.min(after);
        let restored = self.best / after >= RESTORED_SHARE;
        if restored {
            self.baseline = after;
        }
        events.cleans.push(CleanTruth {
            train: recipe.id.clone(),
            start: self.clean_from,
            end: self.at,
            before_per_m: self.clean_before,
            after_per_m: after,
            best_per_m: self.best,
            restored,
        });
        // No train returns to drinking water untested.
        match routine.integrity_test {
            Some((_, takes)) => self.enter(Phase::IntegrityTest, takes),
            None => self.begin_cycle(recipe, routine),
        }
    }

    fn resistance(&self, recipe: &TrainRecipe) -> f64 {
        recipe.r_membrane_per_m + self.r_irrecoverable + self.r_chemical + self.r_reversible
    }

    /// Flux once settled: the flow asked over the area that is left, m/s.
    fn flux_full(&self, recipe: &TrainRecipe) -> f64 {
        self.flux_set_m_s * recipe.area_m2 / self.area_m2(recipe)
    }

    /// Area that is left, m2.
    pub(super) fn area_m2(&self, recipe: &TrainRecipe) -> f64 {
        (recipe.area_m2 - self.area_lost_m2).max(0.01 * recipe.area_m2)
    }

    /// What is true of it now.
    pub(super) fn truth(&self, recipe: &TrainRecipe, site: &Site) -> TrainTruth {
        let into = self.phase_age_s();
        let (flux, tmp) = if self.phase == Phase::Filtration {
            let flux = self.flux_full(recipe) * (1.0 - settling(into, FLOW_SETTLES_S));
            let surplus = 1.0 + PRESSURE_SURPLUS * settling(into, PRESSURE_SETTLES_S);
            let tmp = site.viscosity_pa_s * flux * self.resistance(recipe) * surplus;
            (flux, tmp + recipe.tmp_offset_pa)
        } else {
            (0.0, 0.0)
        };
        TrainTruth {
            at: self.at,
            phase: self.phase,
            r_membrane_per_m: recipe.r_membrane_per_m,
            r_irrecoverable_per_m: self.r_irrecoverable,
            r_chemical_per_m: self.r_chemical,
            r_reversible_per_m: self.r_reversible,
            start_of_cycle_per_m: self.start_of_cycle,
            baseline_per_m: self.baseline,
            cycle_volume_m: self.cycle_volume_m,
            flux_m_s: flux,
            tmp_pa: tmp,
            temperature_degc: site.temperature_degc,
        }
    }
}

fn clean_step(recipe: &TrainRecipe, clean: usize, step: usize) -> Option<&CleanStep> {
    recipe.cleans.get(clean).and_then(|c| c.steps.get(step))
}

/// The first due moment after `at` in steps of `every`.
fn next_due(due: Instant, every_us: i64, at: Instant) -> Instant {
    let every = every_us.max(SECOND_US);
    due.plus((at.since(due) / every + 1) * every)
}

/// What is left of a transient, 1 to 0, so many seconds in.
fn settling(into_s: f64, settles_s: f64) -> f64 {
    if into_s >= SETTLED_S { 0.0 } else { libm::exp(-into_s / settles_s) }
}
