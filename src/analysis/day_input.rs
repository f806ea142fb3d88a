//! Stage 1, first step: a span of one train's readings as delivered, turned into samples in
//! SI. The only place where readings change their unit.

use std::collections::{BTreeMap, BTreeSet};

use crate::base::{CellValue, Column, Instant, MINUTE_US, SourceId, Span, Tag};
use crate::plant::{Phase, Plant, PressureKind, Role, Signal, Train};
use crate::science;

/// Readings as stored, by source and tag.
pub type Readings = BTreeMap<(SourceId, Tag), Column>;

/// Pressure of the air around, Pa; exact by definition of the standard atmosphere.
const STANDARD_ATMOSPHERE_PA: f64 = 101_325.0;
/// Standard acceleration of gravity, m/s2; exact by definition.
const GRAVITY_M_S2: f64 = 9.806_65;
/// A thermometer's last good value stands in for this long: water in a main does not change
/// faster (common practice, no source).
const TEMPERATURE_HOLD_US: i64 = 15 * MINUTE_US;

/// One train's readings on one time axis, in SI; NaN where there is none.
#[derive(Clone, Debug, Default)]
pub struct Samples {
    /// When, strictly ascending.
    pub times: Vec<Instant>,
    /// What the train was doing.
    pub phases: Vec<Phase>,
    /// Permeate flow, m3/s.
    pub flow_m3_s: Vec<f64>,
    /// Flux, m/s.
    pub flux_m_s: Vec<f64>,
    /// Transmembrane pressure, Pa.
    pub tmp_pa: Vec<f64>,
    /// Temperature, degrees Celsius.
    pub temperature_degc: Vec<f64>,
    /// Whether flow or a pressure reads what it read before the last backwash, unmoved.
    pub frozen: Vec<bool>,
    /// Spacing of rows, microseconds.
    pub every_us: i64,
    /// State codes read that the plant file does not name.
    pub unknown_codes: BTreeSet<String>,
}

impl Samples {
    /// A pause in the readings longer than this ends a cycle.
    pub fn gap_us(&self) -> i64 {
        (10 * MINUTE_US).max(2 * self.every_us)
    }
}

/// One quantity in time, with how long a value stands in for the next.
struct Track {
    times: Vec<Instant>,
    values: Vec<f64>,
    hold_us: i64,
}

/// Looks values up in order of time.
struct Cursor<'a> {
    track: &'a Track,
    at: usize,
}

impl Track {
    fn cursor(&self) -> Cursor<'_> {
        Cursor { track: self, at: 0 }
    }
}

impl Cursor<'_> {
    /// The value at `time`; calls come in ascending order.
    fn at(&mut self, time: Instant) -> f64 {
        let times = &self.track.times;
        while self.at + 1 < times.len() && times[self.at + 1] <= time {
            self.at += 1;
        }
        match times.get(self.at) {
            Some(&t) if t <= time && time.since(t) <= self.track.hold_us => {
                self.track.values[self.at]
            }
            _ => f64::NAN,
        }
    }
}

/// Turns readings into samples. `readings` must cover `span`; what lies outside is not used.
pub fn samples(plant: &Plant, train: &Train, readings: &Readings, span: Span) -> Samples {
    let flow = track(plant, train, Role::PermeateFlow, readings, span);
    let temperature = track(plant, train, Role::Temperature, readings, span);
    let feed = track(plant, train, Role::FeedPressure, readings, span);
    let permeate = track(plant, train, Role::PermeatePressure, readings, span);
    let own_tmp = track(plant, train, Role::TransmembranePressure, readings, span);
    let (state_times, state_phases, unknown_codes) = states(train, readings, span);
    let state = Track {
        values: (0..state_times.len()).map(|i| i as f64).collect(),
        times: state_times,
        hold_us: state_hold_us(plant, train),
    };
    let times = union(&flow.times, &state.times);
    let n = times.len();
    let mut out = Samples {
        phases: Vec::with_capacity(n),
        flow_m3_s: Vec::with_capacity(n),
        flux_m_s: Vec::with_capacity(n),
        tmp_pa: Vec::with_capacity(n),
        temperature_degc: Vec::with_capacity(n),
        frozen: Vec::with_capacity(n),
        every_us: every_us(plant, train),
        unknown_codes,
        times,
    };
    let (mut flow, mut temperature) = (flow.cursor(), temperature.cursor());
    let (mut feed, mut permeate, mut own_tmp) =
        (feed.cursor(), permeate.cursor(), own_tmp.cursor());
    let mut state = state.cursor();
    let has_pressures = train.signals_of(Role::FeedPressure).next().is_some();
    let mut still = [Still::default(); 3];
    for &time in &out.times {
        let flow_m3_s = flow.at(time);
        let index = state.at(time);
        let phase = if index.is_nan() { Phase::Unknown } else { state_phases[index as usize] };
        let (feed_pa, permeate_pa) = (feed.at(time), permeate.at(time));
        let (tmp_pa, first_pa) = if has_pressures {
            (science::tmp_dead_end_pa(feed_pa, permeate_pa), feed_pa)
        } else {
            let own = own_tmp.at(time);
            (own, own)
        };
        let seen = [flow_m3_s, first_pa, permeate_pa];
        let frozen = still.iter_mut().zip(seen).fold(false, |f, (s, v)| s.see(v, phase) || f);
        out.frozen.push(frozen);
        out.phases.push(phase);
        out.flow_m3_s.push(flow_m3_s);
        out.flux_m_s.push(flow_m3_s / train.area_at(time));
        out.tmp_pa.push(tmp_pa);
        out.temperature_degc.push(temperature.at(time));
    }
    out
}

/// Tells an instrument that stands still from one that reads a steady plant: flow and pressures
/// all move when a train is backwashed.
#[derive(Clone, Copy, Default)]
struct Still {
    value: f64,
    /// The value was read in filtration.
    filtered: bool,
    /// And then in a backwash.
    backwashed: bool,
}

impl Still {
    /// Takes the next value; answers whether it is frozen. A value that is not there tells nothing.
    fn see(&mut self, value: f64, phase: Phase) -> bool {
        if value.is_nan() {
            return false;
        }
        if value != self.value {
            *self = Self { value, ..Self::default() };
        }
        let filtration = phase == Phase::Filtration;
        let backwash = matches!(phase, Phase::Backwash | Phase::ChemicalBackwash);
        self.backwashed |= self.filtered && backwash;
        self.filtered |= filtration;
        filtration && self.backwashed
    }
}

/// The (source, tag) pairs whose readings a train's samples need.
pub fn tags_needed(train: &Train) -> BTreeSet<(SourceId, Tag)> {
    const ROLES: [Role; 6] = [
        Role::PermeateFlow,
        Role::Temperature,
        Role::FeedPressure,
        Role::PermeatePressure,
        Role::TransmembranePressure,
        Role::State,
    ];
    train
        .signals
        .iter()
        .filter(|s| ROLES.contains(&s.role))
        .map(|s| (s.source.clone(), s.tag.clone()))
        .collect()
}

/// Spacing of the rows that carry the train's flow.
pub fn every_us(plant: &Plant, train: &Train) -> i64 {
    train
        .signals_of(Role::PermeateFlow)
        .next()
        .and_then(|s| plant.source(&s.source))
        .map_or(MINUTE_US, |s| s.every_us)
}

fn state_hold_us(plant: &Plant, train: &Train) -> i64 {
    train.signals_of(Role::State).map(|s| hold_us(plant, s)).max().unwrap_or(0)
}

/// How long a signal's value stands in for the next: its own hold, the source's, or, for a
/// state that drops out, two rows.
fn hold_us(plant: &Plant, signal: &Signal) -> i64 {
    let source = plant.source(&signal.source);
    let declared = signal.max_hold_us.or(source.and_then(|s| s.hold_us)).unwrap_or(0);
    let every_us = source.map_or(MINUTE_US, |s| s.every_us);
    match signal.role {
        Role::Temperature => declared.max(TEMPERATURE_HOLD_US).max(2 * every_us),
        Role::State => declared.max(2 * every_us),
        _ => declared,
    }
}

/// Dated signals of a role joined to one track, in SI.
fn track(plant: &Plant, train: &Train, role: Role, readings: &Readings, span: Span) -> Track {
    let signals: Vec<&Signal> = train.signals_of(role).collect();
    let hold_us = signals.iter().map(|s| hold_us(plant, s)).max().unwrap_or(0);
    let mut out = Track { times: Vec::new(), values: Vec::new(), hold_us };
    for (signal, column, part) in segments(&signals, readings, span) {
        let (a, b) = cut(column, part);
        for (time, value) in column.times[a..b].iter().zip(&column.values[a..b]) {
            match value {
                CellValue::Number(v) => {
                    out.times.push(*time);
                    out.values.push(to_si(signal, *v));
                }
                // Where a value may stand in for the next, a bad one is simply not there.
                _ if hold_us > 0 => {}
                _ => {
                    out.times.push(*time);
                    out.values.push(f64::NAN);
                }
            }
        }
    }
    out
}

/// The spans in which each dated signal holds, with its readings.
fn segments<'a>(
    signals: &[&'a Signal],
    readings: &'a Readings,
    span: Span,
) -> Vec<(&'a Signal, &'a Column, Span)> {
    let mut out = Vec::new();
    for (k, signal) in signals.iter().enumerate() {
        let next = signals.get(k + 1).map_or(span.to, |s| s.from.min(span.to));
        let part = Span::new(signal.from.max(span.from), next);
        if part.from >= part.to {
            continue;
        }
        if let Some(column) = readings.get(&(signal.source.clone(), signal.tag.clone())) {
            out.push((*signal, column, part));
        }
    }
    out
}

fn cut(column: &Column, span: Span) -> (usize, usize) {
    (
        column.times.partition_point(|t| *t < span.from),
        column.times.partition_point(|t| *t < span.to),
    )
}

/// A reading in SI: unit, kind of gauge, and height of the transmitter.
fn to_si(signal: &Signal, value: f64) -> f64 {
    let si = signal.unit.map_or(value, |u| value * u.factor + u.offset);
    if !matches!(
        signal.role,
        Role::FeedPressure | Role::PermeatePressure | Role::ConcentratePressure
    ) {
        return si;
    }
    let gauge = match signal.pressure {
        PressureKind::Gauge => si,
        PressureKind::Absolute => si - STANDARD_ATMOSPHERE_PA,
        PressureKind::Vacuum => -si,
    };
    // Density changes by 1 % from 0 to 40 degC; at 1 m that is 0.1 kPa, under any gauge's error.
    gauge + 999.0 * GRAVITY_M_S2 * signal.elevation_m
}

type StateTrack = (Vec<Instant>, Vec<Phase>, BTreeSet<String>);

fn states(train: &Train, readings: &Readings, span: Span) -> StateTrack {
    let signals: Vec<&Signal> = train.signals_of(Role::State).collect();
    let (mut times, mut phases, mut unknown) = (Vec::new(), Vec::new(), BTreeSet::new());
    for (signal, column, part) in segments(&signals, readings, span) {
        let codes = Codes::of(signal);
        let (a, b) = cut(column, part);
        let mut last: Option<(CellValue, Phase)> = None;
        for (time, value) in column.times[a..b].iter().zip(&column.values[a..b]) {
            let phase = match last {
                Some((v, phase)) if v == *value => phase,
                _ => match codes.phase(*value, column) {
                    Ok(Some(phase)) => phase,
                    Ok(None) => continue,
                    Err(code) => {
                        unknown.insert(code);
                        Phase::Unknown
                    }
                },
            };
            last = Some((*value, phase));
            times.push(*time);
            phases.push(phase);
        }
    }
    (times, phases, unknown)
}

/// State codes by number and by word.
struct Codes<'a> {
    numbers: Vec<(f64, Phase)>,
    words: Vec<(&'a str, Phase)>,
}

impl<'a> Codes<'a> {
    fn of(signal: &'a Signal) -> Self {
        let numbers =
            signal.states.iter().filter_map(|(t, p)| t.trim().parse().ok().map(|n: f64| (n, *p)));
        let words = signal.states.iter().map(|(t, p)| (t.trim(), *p));
        Self { numbers: numbers.collect(), words: words.collect() }
    }

    /// The phase of a value; `None` for a bad one; the code itself where it is not named.
    fn phase(&self, value: CellValue, column: &Column) -> Result<Option<Phase>, String> {
        match value {
            CellValue::Bad(_) => Ok(None),
            CellValue::Number(v) => self
                .numbers
                .iter()
                .find(|(n, _)| *n == v)
                .map(|(_, p)| Some(*p))
                .ok_or(v.to_string()),
            CellValue::Word(w) => {
                let word = column.word(w).trim();
                self.words
                    .iter()
                    .find(|(t, _)| t.eq_ignore_ascii_case(word))
                    .map(|(_, p)| Some(*p))
                    .ok_or(word.to_owned())
            }
        }
    }
}

/// Both lists in one, each moment once.
fn union(a: &[Instant], b: &[Instant]) -> Vec<Instant> {
    if a == b {
        return a.to_vec();
    }
    let mut out = Vec::with_capacity(a.len().max(b.len()));
    let (mut i, mut j) = (0, 0);
    while i < a.len() || j < b.len() {
        let next = match (a.get(i), b.get(j)) {
            (Some(x), Some(y)) => *x.min(y),
            (Some(x), None) => *x,
            (None, Some(y)) => *y,
            (None, None) => break,
        };
        i += usize::from(a.get(i) == Some(&next));
        j += usize::from(b.get(j) == Some(&next));
        out.push(next);
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_value_is_frozen_once_a_backwash_has_not_moved_it() {
        use Phase::{Backwash, Filtration, Standby};
        let frozen = |seen: &[(f64, Phase)]| {
            let mut still = Still::default();
            seen.iter().map(|(v, p)| still.see(*v, *p)).collect::<Vec<_>>()
        };
        let steady = [(3.0, Filtration), (3.0, Filtration), (3.0, Standby), (3.0, Filtration)];
        assert_eq!(frozen(&steady), [false; 4], "nothing had to move");
        let moved = [(3.0, Filtration), (5.0, Backwash), (3.0, Filtration)];
        assert_eq!(frozen(&moved), [false; 3]);
        let not_there = [(3.0, Filtration), (f64::NAN, Backwash), (3.0, Filtration)];
        assert_eq!(frozen(&not_there), [false; 3]);
        let stuck = [(3.0, Filtration), (3.0, Backwash), (3.0, Filtration), (3.1, Filtration)];
        assert_eq!(frozen(&stuck), [false, false, true, false]);
    }
}
