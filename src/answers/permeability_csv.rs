//! A series as CSV after RFC 4180, the unit of each column in the header row.

use std::fmt::Write as _;

use super::permeability_view::PermeabilityView;

/// The series, one line a point. No field holds a comma or a quotation mark.
pub fn permeability_csv(view: &PermeabilityView) -> String {
    let u = &view.units;
    let mut out = format!(
        "time,permeability [{0}],permeability_min [{0}],permeability_max [{0}],\
         permeability_start_of_cycle [{0}],flux [{1}],tmp [{2}],temperature [{3}],\
         resistance [{4}],samples,coverage,quality,reasons\r\n",
        u.permeability, u.flux, u.tmp, u.temperature, u.resistance
    );
    for p in &view.points {
        out.push_str(p.time.as_str());
        for value in [
            p.permeability,
            p.permeability_min,
            p.permeability_max,
            p.permeability_start_of_cycle,
            p.flux,
            p.tmp,
            p.temperature,
            p.resistance,
        ] {
            out.push(',');
            if let Some(v) = value {
                // Writing to a String cannot fail.
                let _ = write!(out, "{v}");
            }
        }
        let reasons = p.reasons.join(" ");
        let _ = write!(out, ",{},{},{},{reasons}\r\n", p.samples, p.coverage, p.quality);
    }
    out
}
