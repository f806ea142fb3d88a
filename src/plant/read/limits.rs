//! `[limits]`, `[train.membrane_limits]` and `[integrity]`.

use super::procedure::chlorine_mg_l;
use super::walk::{Section, Value};
use crate::base::{DAY_US, Dimension, HOUR_US};
use crate::plant::{HoldLimit, IntegrityValues, Limits, MembraneLimits};

/// What holds where the file says nothing. No TMP limit is common to all membranes.
pub(super) const DEFAULT_LIMITS: Limits = Limits {
    permeability_loss: HoldLimit { advisory: 0.20, clean: 0.30 },
    tmp_pa: HoldLimit { advisory: f64::INFINITY, clean: f64::INFINITY },
    on_delay_us: 6 * HOUR_US,
    deadband: 0.02,
    planning_horizon_us: 14 * DAY_US,
};

/// Reads `[limits]` or `[train.limits]` on top of those that hold without it.
pub(super) fn limits(section: Section<'_>, under: &Limits) -> Limits {
    let loss =
        |v: &Value<'_>| v.within(Dimension::Share, 0.001..=0.99, "a loss above 0 and below 100 %");
    let tmp = |v: &Value<'_>| v.positive(Dimension::Pressure);
    let limits = Limits {
        permeability_loss: HoldLimit {
            advisory: section
                .optional("permeability_loss_advisory", loss)
                .unwrap_or(under.permeability_loss.advisory),
            clean: section
                .optional("permeability_loss_clean", loss)
                .unwrap_or(under.permeability_loss.clean),
        },
        tmp_pa: HoldLimit {
            advisory: section.optional("tmp_advisory", tmp).unwrap_or(under.tmp_pa.advisory),
            clean: section.optional("tmp_clean", tmp).unwrap_or(under.tmp_pa.clean),
        },
        on_delay_us: section
            .optional("on_delay", Value::duration_or_zero_us)
            .unwrap_or(under.on_delay_us),
        deadband: section
            .optional("deadband", |v| v.within(Dimension::Share, 0.0..=0.5, "from 0 to 50 %"))
            .unwrap_or(under.deadband),
        planning_horizon_us: section
            .optional("planning_horizon", Value::duration_us)
            .unwrap_or(under.planning_horizon_us),
    };
    check_order(&section, &limits);
    section.finish();
    limits
}

fn check_order(section: &Section<'_>, limits: &Limits) {
    if !section.is_there() {
        return;
    }
    let place = |key: &'static str, other: &'static str| {
        section.get(key).or_else(|| section.get(other)).map_or(section.span.clone(), |v| v.span)
    };
    let loss = limits.permeability_loss;
    let help = "the advisory limit comes first; check which of the two is meant";
    if loss.advisory > loss.clean {
        section.report.mistake_help(
            &place("permeability_loss_advisory", "permeability_loss_clean"),
            format!(
                "the advisory loss of {} % lies beyond the clean limit of {} %",
                per_cent(loss.advisory),
                per_cent(loss.clean)
            ),
            help,
        );
    }
    if loss.advisory <= limits.deadband {
        section.report.mistake_help(
            &place("deadband", "permeability_loss_advisory"),
            "a deadband as large as the advisory loss would never let it go",
            "write a smaller deadband, such as `2 %`",
        );
    }
    let tmp = limits.tmp_pa;
    if tmp.advisory.is_finite() && tmp.advisory > tmp.clean {
        section.report.mistake_help(
            &place("tmp_advisory", "tmp_clean"),
            format!(
                "the advisory TMP of {} bar lies beyond the clean limit of {} bar",
                tmp.advisory / 1e5,
                tmp.clean / 1e5
            ),
            help,
        );
    }
}

/// A share in per cent, without the dust of binary fractions.
fn per_cent(share: f64) -> f64 {
    (share * 1e8).round() / 1e6
}

/// Reads `[train.membrane_limits]`.
pub(super) fn membrane_limits(section: Section<'_>) -> Option<MembraneLimits> {
    if !section.is_there() {
        return None;
    }
    let limits = MembraneLimits {
        ph: section.optional("ph", Value::ph_range),
        temperature_degc: section.optional("temperature", |v| {
            v.within(Dimension::Temperature, 0.0..=150.0, "from 0 to 150 degC")
        }),
        free_chlorine_mg_l: section.optional("free_chlorine", chlorine_mg_l),
    };
    section.finish();
    Some(limits)
}

/// Reads `[integrity]` or `[train.integrity]`: approved values, so none has a default.
pub(super) fn integrity(section: Section<'_>) -> Option<IntegrityValues> {
    if !section.is_there() {
        return None;
    }
    let number = |v: &Value<'_>| v.number_within(1.0..=1e6, "a number of at least 1");
    let alcr = section.required("alcr", "30", number);
    let vcf = section.required("vcf", "1.0", number);
    let volume = section.required("hold_up_volume", "\"900 L\"", |v| v.positive(Dimension::Volume));
    let flow = section.required("design_flow", "\"245 m3/h\"", |v| v.positive(Dimension::Flow));
    section.finish();
    Some(IntegrityValues {
        alcr: alcr?,
        vcf: vcf?,
        hold_up_volume_m3: volume?,
        design_flow_m3_s: flow?,
    })
}
