//! Writes rows as a historian exports them: wide, local time, fixed decimals, and the dirt
//! that the recipe asks for.

use super::plant::Row;
use super::recipe::{Recipe, THERMOMETER_TAG};
use super::rng::Rng;
use crate::base::{HOUR_US, Instant, MINUTE_US};
use crate::plant::Phase;

/// The header line of the export, with its line end: `Timestamp`, then each train's feed
/// pressure, permeate pressure and permeate flow and, after the first train's, the plant's
/// thermometer, then the train's state.
pub fn header(recipe: &Recipe) -> String {
    let mut line = "Timestamp".to_owned();
    for (number, train) in recipe.trains.iter().enumerate() {
        let tags = train.tags();
        let thermometer = (number == 0).then(|| THERMOMETER_TAG.to_owned());
        let tags = [tags.feed_pressure, tags.permeate_pressure, tags.permeate_flow]
            .into_iter()
            .chain(thermometer)
            .chain([tags.state]);
        for tag in tags {
            line.push(',');
            line.push_str(&tag);
        }
    }
    line.push('\n');
    line
}

/// The number by which the export names a state.
pub fn state_code(phase: Phase) -> i64 {
    match phase {
        Phase::Filtration => 1,
        Phase::Backwash => 2,
        Phase::ChemicalBackwash => 3,
        Phase::CleanInPlace => 4,
        Phase::IntegrityTest => 5,
        _ => 0,
    }
}

/// Writes the lines of one export.
#[derive(Clone, Debug)]
pub(super) struct Writer {
    rng: Rng,
    clock: Clock,
    gap_left: u32,
    line: String,
    /// A line that comes after the next one.
    late: String,
}

/// What becomes of one line's cells.
#[derive(Clone, Copy)]
struct Spoilt {
    column: usize,
    text: &'static str,
}

impl Writer {
    pub(super) fn new(rng: Rng) -> Self {
        let clock = Clock {
            from: Instant::from_micros(0),
            until: Instant::from_micros(i64::MIN),
            prefix: String::new(),
            minute: 0,
            near_change: false,
        };
        Self { rng, clock, gap_left: 0, line: String::new(), late: String::new() }
    }

    /// Writes a row, or what the dirt makes of it.
    pub(super) fn row(&mut self, row: &Row, recipe: &Recipe, out: &mut String) {
        let dirt = &recipe.dirt;
        if self.gap_left == 0 && self.rng.uniform() < dirt.gaps_per_day / 1440.0 {
            self.gap_left = 5 + self.rng.below(21) as u32;
        }
        let spoilt = self.spoil(recipe);
        let fate = self.rng.uniform();
        if self.gap_left > 0 {
            self.gap_left -= 1;
            return;
        }
        self.clock.set(row.at, recipe);
        self.line.clear();
        write_line(&mut self.line, &self.clock, row, spoilt);

        let repeated = dirt.repeated_rows;
        let ragged = repeated + dirt.ragged_rows;
        let late = ragged + dirt.late_rows;
        if (repeated..ragged).contains(&fate) {
            self.make_ragged();
        }
        self.line.push('\n');
        // A line held back past the hour would stand in another piece of the export.
        let last_of_hour = row.at.micros().rem_euclid(HOUR_US) == HOUR_US - MINUTE_US;
        let may_wait = !last_of_hour && !self.clock.near_change && self.late.is_empty();
        if (ragged..late).contains(&fate) && may_wait {
            std::mem::swap(&mut self.late, &mut self.line);
            return;
        }
        out.push_str(&self.line);
        if fate < repeated {
            out.push_str(&self.line);
        }
        self.flush(out);
    }

    /// Writes what waits.
    pub(super) fn flush(&mut self, out: &mut String) {
        out.push_str(&self.late);
        self.late.clear();
    }

    fn spoil(&mut self, recipe: &Recipe) -> Option<Spoilt> {
        // At most one cell a row: at these rates the second would be as rare as a comet.
        let cells = 4 * recipe.trains.len() + 1;
        let dirt = &recipe.dirt;
        let drawn = self.rng.uniform() / cells as f64;
        let empty = dirt.bad_cells + dirt.empty_cells;
        let text = if drawn < 0.5 * dirt.bad_cells {
            "Bad"
        } else if drawn < dirt.bad_cells {
            "No reply"
        } else if drawn < empty {
            ""
        } else if drawn < empty + dirt.sentinel_cells {
            "-9999"
        } else {
            return None;
        };
        Some(Spoilt { column: self.rng.below(cells), text })
    }

    fn make_ragged(&mut self) {
        let commas = self.line.bytes().filter(|b| *b == b',').count();
        let keep = self.rng.below(commas + 1);
        match self.line.match_indices(',').nth(keep).map(|(at, _)| at) {
            Some(at) => self.line.truncate(at),
            None => self.line.push_str(",0.000"),
        }
    }
}

/// The local clock, asked of the zone once in a quarter of an hour: no zone changes between.
#[derive(Clone, Debug)]
struct Clock {
    from: Instant,
    until: Instant,
    /// `2026-03-02 05:`
    prefix: String,
    minute: i64,
    near_change: bool,
}

impl Clock {
    fn set(&mut self, at: Instant, recipe: &Recipe) {
        if (self.from..self.until).contains(&at) {
            return;
        }
        let zone = &recipe.zone;
        let quarter = 15 * MINUTE_US;
        self.from = at.plus(-at.micros().rem_euclid(quarter));
        self.until = self.from.plus(quarter);
        let wall = zone.wall(self.from);
        self.prefix.clear();
        for (value, width, after) in [
            (i64::from(wall.year), 4, '-'),
            (i64::from(wall.month), 2, '-'),
            (i64::from(wall.day), 2, ' '),
            (i64::from(wall.hour), 2, ':'),
        ] {
            push_padded(&mut self.prefix, value, width);
            self.prefix.push(after);
        }
        self.minute = i64::from(wall.minute);
        let around = 3 * HOUR_US;
        self.near_change =
            zone.offset_s(self.from.plus(-around)) != zone.offset_s(self.from.plus(around));
    }

    fn write(&self, at: Instant, line: &mut String) {
        line.push_str(&self.prefix);
        push_padded(line, self.minute + at.since(self.from) / MINUTE_US, 2);
        line.push_str(":00");
    }
}

fn write_line(line: &mut String, clock: &Clock, row: &Row, spoilt: Option<Spoilt>) {
    clock.write(row.at, line);
    let mut column = 0;
    let mut cell = |line: &mut String, value: f64, decimals: u32| {
        line.push(',');
        match spoilt {
            Some(spoilt) if spoilt.column == column => line.push_str(spoilt.text),
            _ => push_fixed(line, value, decimals),
        }
        column += 1;
    };
    for (number, train) in row.trains.iter().enumerate() {
        cell(line, train.feed_pressure_pa * 1e-5, 3);
        cell(line, train.permeate_pressure_pa * 1e-5, 3);
        cell(line, train.permeate_flow_m3_s * 3600.0, 1);
        if number == 0 {
            cell(line, row.temperature_degc, 2);
        }
        cell(line, state_code(train.phase) as f64, 0);
    }
}

/// Puts a whole number with leading noughts.
fn push_padded(out: &mut String, value: i64, width: usize) {
    let mut divisor = 10_i64.pow(width as u32 - 1);
    while divisor > 0 {
        out.push(char::from(b'0' + (value / divisor % 10) as u8));
        divisor /= 10;
    }
}

/// Puts a number with so many decimals, at most 6, rounded half away from nought; never `-0`.
/// By hand because the standard formatter would take longer than the plant.
fn push_fixed(out: &mut String, value: f64, decimals: u32) {
    let scale = 10_u64.pow(decimals);
    let scaled = (value.abs() * scale as f64 + 0.5) as u64;
    let mut digits = [b'0'; 24];
    let mut at = digits.len();
    let mut rest = scaled;
    let mut written = 0;
    while rest > 0 || written <= decimals {
        if written == decimals && decimals > 0 {
            at -= 1;
            digits[at] = b'.';
        }
        at -= 1;
        digits[at] = b'0' + (rest % 10) as u8;
        rest /= 10;
        written += 1;
    }
    if value < 0.0 && scaled > 0 {
        at -= 1;
        digits[at] = b'-';
    }
    out.push_str(std::str::from_utf8(&digits[at..]).unwrap_or_default());
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_written_as_the_standard_formatter_does() {
        for (value, decimals) in [
            (0.0, 3),
            (0.0004, 3),
            (-0.0004, 3),
            (1.2344, 3),
            (-1.2346, 3),
            (987.64, 1),
            (-1_002.97, 1),
            (7.0, 0),
            (12.3449, 2),
            (1e7, 3),
        ] {
            let mut hand = String::new();
            push_fixed(&mut hand, value, decimals);
            let standard = format!("{value:.0$}", decimals as usize);
            assert_eq!(hand, standard.replace("-0.000", "0.000"));
        }
    }
}
