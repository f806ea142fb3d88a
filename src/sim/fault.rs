//! What goes wrong in an invented plant: instruments, and trains.

use crate::base::{Instant, Span};

/// An instrument.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[expect(missing_docs, reason = "the names say it")]
pub enum Sensor {
    FeedPressure,
    PermeatePressure,
    PermeateFlow,
    Temperature,
}

/// What an instrument does wrong, in its own unit: Pa, m3/s, K.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Wrong {
    /// Shows so much more.
    Offset(f64),
    /// Shows so much more with each day of the fault.
    DriftPerDay(f64),
    /// Shows this factor times the truth.
    Gain(f64),
    /// Shows what it showed when the fault began.
    Frozen,
}

/// A fault of one instrument.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SensorFault {
    /// Which.
    pub sensor: Sensor,
    /// When.
    pub span: Span,
    /// What.
    pub wrong: Wrong,
}

/// What goes wrong with a train.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Fault {
    /// One of its instruments.
    Sensor(SensorFault),
    /// Modules are isolated: so much less area from then on, m2. The flow asked stays.
    AreaLost(Instant, f64),
    /// Solids lodge where no chemical brings them back, 1/m at once.
    Clogged(Instant, f64),
}

impl SensorFault {
    /// What the sensor shows, given what it would show in order. `frozen` is kept by the
    /// caller, one for each sensor.
    pub(super) fn apply(
        faults: &[Self],
        sensor: Sensor,
        at: Instant,
        shown: f64,
        frozen: &mut Option<f64>,
    ) -> f64 {
        let mut value = shown;
        let mut held = None;
        for fault in faults.iter().filter(|f| f.sensor == sensor && f.span.contains(at)) {
            match fault.wrong {
                Wrong::Offset(by) => value += by,
                Wrong::DriftPerDay(by) => value += by * at.days_since(fault.span.from),
                Wrong::Gain(by) => value *= by,
                Wrong::Frozen => held = Some(frozen.unwrap_or(value)),
            }
        }
        *frozen = held;
        held.unwrap_or(value)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::DAY_US;

    #[test]
    fn faults_of_a_sensor_add_up_and_a_frozen_one_keeps_its_first_value() {
        let at = |days: i64| Instant::from_micros(days * DAY_US);
        let fault = |wrong, from, to| SensorFault {
            sensor: Sensor::FeedPressure,
            span: Span::new(at(from), at(to)),
            wrong,
        };
        let faults = [
            fault(Wrong::Gain(2.0), 0, 20),
            fault(Wrong::DriftPerDay(80.0), 1, 20),
            fault(Wrong::Offset(-5.0), 0, 20),
            fault(Wrong::Frozen, 5, 7),
        ];
        let mut frozen = None;
        let mut show = |day: i64, value: f64| {
            SensorFault::apply(&faults, Sensor::FeedPressure, at(day), value, &mut frozen)
        };
        assert_eq!(show(0, 100.0), 195.0);
        assert_eq!(show(3, 100.0), 355.0);
        assert_eq!(show(5, 100.0), 515.0);
        assert_eq!(show(6, 900.0), 515.0);
        assert_eq!(show(7, 100.0), 675.0);
        assert_eq!(show(20, 100.0), 100.0);
    }
}
