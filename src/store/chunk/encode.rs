use super::{ChunkError, SCALES};
use crate::base::{CellValue, Column};

/// From here on whole numbers of a double are too far apart for the check to mean anything.
const WHOLE_MAX: f64 = 4_503_599_627_370_496.0;
/// Instruments rarely export finer than this; beyond it a few odd values may have asked for it.
const USUAL_DECIMALS: usize = 4;

/// Writes one day of one tag. The column must not be empty, and be strictly ascending.
///
/// # Errors
/// If times are not strictly ascending, a number is not finite, or a word is not listed.
pub fn encode(column: &Column) -> Result<String, ChunkError> {
    let ascending = column.times.windows(2).all(|w| matches!(w, [a, b] if a < b));
    if !ascending || column.is_empty() || column.times.len() != column.values.len() {
        return Err(ChunkError::NotAscending);
    }
    let (words, places) = canonical_words(column)?;
    let numbers = column.values.iter().any(|v| matches!(v, CellValue::Number(_)));
    let power = if numbers { Some(scale_power(&column.values)) } else { None };
    let times = Times::of(column);

    let mut out = Vec::with_capacity(160 + column.len() * 4);
    times.write_head(&mut out);
    if let Some(power) = power {
        out.extend_from_slice(b",\"scale\":1");
        out.resize(out.len() + power, b'0');
    }
    if !words.is_empty() {
        out.extend_from_slice(b",\"words\":");
        serde_json::to_writer(&mut out, &words).map_err(|_| ChunkError::Value(0))?;
    }
    times.write_deltas(&mut out, column);
    write_values(&mut out, column, &places, power, &times);
    out.push(b'}');
    String::from_utf8(out).map_err(|_| ChunkError::Value(0))
}

/// The words in use as they first occur, and each old index's place among them. Refuses what
/// cannot be written, so that nothing after it needs to.
fn canonical_words(column: &Column) -> Result<(Vec<String>, Vec<u32>), ChunkError> {
    let mut words: Vec<String> = Vec::new();
    let mut places = vec![u32::MAX; column.words.len()];
    for (i, value) in column.values.iter().enumerate() {
        match *value {
            CellValue::Number(v) if v.is_finite() => {}
            CellValue::Number(_) => return Err(ChunkError::Value(i)),
            CellValue::Word(w) | CellValue::Bad(w) => {
                let word = column.words.get(w as usize).ok_or(ChunkError::Value(i))?;
                let place = places.get_mut(w as usize).ok_or(ChunkError::Value(i))?;
                if *place == u32::MAX {
                    let known = words.iter().position(|k| k == word);
                    *place = known.unwrap_or(words.len()) as u32;
                    if known.is_none() {
                        words.push(word.clone());
                    }
                }
            }
        }
    }
    Ok((words, places))
}

/// The whole number that stands for `v` at this scale, if it comes back bit for bit.
fn scaled(v: f64, power: usize) -> Option<i64> {
    let scale = SCALES[power];
    let x = v * scale;
    if x.abs() >= WHOLE_MAX {
        return None;
    }
    let whole = (x + 0.5f64.copysign(x)) as i64;
    ((whole as f64 / scale).to_bits() == v.to_bits()).then_some(whole)
}

/// How many decimals to keep: enough for all values that fit, unless only a few of them (one
/// in sixteen) asked for many.
fn scale_power(values: &[CellValue]) -> usize {
    let numbers = || {
        values.iter().filter_map(|v| match v {
            CellValue::Number(v) => Some(*v),
            _ => None,
        })
    };
    let mut power = 0;
    for v in numbers() {
        if scaled(v, power).is_none() {
            power = (power + 1..SCALES.len()).find(|p| scaled(v, *p).is_some()).unwrap_or(power);
        }
    }
    if power <= USUAL_DECIMALS {
        return power;
    }
    let mut wants = [0usize; SCALES.len()];
    for v in numbers() {
        if let Some(p) = (0..SCALES.len()).find(|p| scaled(v, *p).is_some()) {
            wants[p] += 1;
        }
    }
    let few = wants.iter().sum::<usize>() / 16;
    let mut finer = 0;
    while power > 0 && finer + wants[power] <= few {
        finer += wants[power];
        power -= 1;
    }
    power
}

/// How the times of a day are written.
struct Times {
    start_us: i64,
    /// Greatest common divisor of the distances; 0 for a single reading.
    tick_us: i64,
    grid: bool,
}

impl Times {
    fn of(column: &Column) -> Self {
        let (mut tick, mut last_delta) = (0i64, 0i64);
        for pair in column.times.windows(2) {
            let delta = pair[1].since(pair[0]);
            if delta != last_delta {
                last_delta = delta;
                tick = gcd(tick, delta);
            }
        }
        let start_us = column.times.first().map_or(0, |t| t.micros());
        let end_us = column.times.last().map_or(0, |t| t.micros());
        let places = if tick == 0 { 1 } else { (end_us - start_us) / tick + 1 };
        let n = column.len() as i64;
        // An empty place costs five bytes, a distance two or so.
        Self { start_us, tick_us: tick, grid: (places - n).saturating_mul(5) <= 2 * n }
    }
    fn write_head(&self, out: &mut Vec<u8>) {
        out.extend_from_slice(b"{\"start\":");
        write_int(out, self.start_us);
        out.extend_from_slice(if self.grid { b",\"step\":" } else { b",\"tick\":" });
        write_int(out, self.tick_us);
    }
    fn write_deltas(&self, out: &mut Vec<u8>, column: &Column) {
        if self.grid {
            return;
        }
        out.extend_from_slice(b",\"dt\":[0");
        for pair in column.times.windows(2) {
            out.push(b',');
            write_int(out, pair[1].since(pair[0]) / self.tick_us.max(1));
        }
        out.push(b']');
    }
    /// Empty places of the grid before the reading at `us`, the one before it being at `last`.
    fn skipped(&self, last_us: i64, us: i64) -> i64 {
        if self.grid && us - last_us > self.tick_us { (us - last_us) / self.tick_us - 1 } else { 0 }
    }
}

fn gcd(mut a: i64, mut b: i64) -> i64 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

fn write_values(
    out: &mut Vec<u8>,
    column: &Column,
    places: &[u32],
    power: Option<usize>,
    times: &Times,
) {
    out.extend_from_slice(b",\"v\":[");
    let (mut last_us, mut whole) = (times.start_us, 0i64);
    for (i, (time, value)) in column.times.iter().zip(&column.values).enumerate() {
        let us = time.micros();
        for _ in 0..times.skipped(last_us, us) {
            out.extend_from_slice(b",null");
        }
        last_us = us;
        if i > 0 {
            out.push(b',');
        }
        let place = |w: u32| i64::from(places.get(w as usize).copied().unwrap_or(0));
        match (*value, power) {
            (CellValue::Number(v), power) => match scaled(v, power.unwrap_or(0)) {
                Some(next) => {
                    write_int(out, next - whole);
                    whole = next;
                }
                // Debug, because it always writes a point or an exponent, and the shortest
                // digits that come back as the same number.
                None => out.extend_from_slice(format!("{v:?}").as_bytes()),
            },
            (CellValue::Word(w), None) => write_int(out, place(w)),
            (CellValue::Word(w), Some(_)) => write_marked(out, b'w', place(w)),
            (CellValue::Bad(w), _) => write_marked(out, b'b', place(w)),
        }
    }
    out.push(b']');
}

fn write_marked(out: &mut Vec<u8>, mark: u8, place: i64) {
    out.extend_from_slice(&[b'"', mark]);
    write_int(out, place);
    out.push(b'"');
}

fn write_int(out: &mut Vec<u8>, v: i64) {
    if v < 0 {
        out.push(b'-');
    }
    let mut rest = v.unsigned_abs();
    if rest < 10 {
        out.push(b'0' + rest as u8);
        return;
    }
    let mut digits = [0u8; 20];
    let mut at = digits.len();
    while rest > 0 {
        at -= 1;
        digits[at] = b'0' + (rest % 10) as u8;
        rest /= 10;
    }
    out.extend_from_slice(&digits[at..]);
}
