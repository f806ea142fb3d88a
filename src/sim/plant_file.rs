//! The plant file that goes with an invented plant.

use std::fmt::{self, Write};

use super::clean::procedure_steps;
use super::recipe::{Recipe, THERMOMETER_TAG, TrainRecipe};
use super::water::season_degc;
use crate::base::{DAY_US, HOUR_US, Instant};
use crate::plant::{Step, StepClass};

/// One m/(s.Pa) in L/(m2.h.bar).
const LMH_BAR: f64 = 3.6e11;

/// The plant file, in TOML: where the daemon listens (`127.0.0.1:8420`) and keeps its database
/// (a path relative to the file, or absolute), the export's layout, each train with its tags
/// and its last good clean before the data, limits, the membrane's limits, the site's
/// procedure, integrity values and the season to expect.
pub fn plant_toml(recipe: &Recipe, listen: &str, database: &str) -> String {
    let mut text = String::new();
    // Writing into a String cannot fail.
    let _ = write_file(&mut text, recipe, listen, database);
    text
}

fn write_file(out: &mut String, recipe: &Recipe, listen: &str, database: &str) -> fmt::Result {
    let zone = recipe.zone.name();
    writeln!(out, "# An invented plant. Its readings come from a simulation.\n\n[plant]")?;
    writeln!(out, "id = {}", quoted(&recipe.plant_id))?;
    writeln!(out, "name = {}", quoted(&recipe.plant_name))?;
    writeln!(out, "time_zone = {}", quoted(zone))?;
    writeln!(out, "\n[service]")?;
    writeln!(out, "listen = {}", quoted(listen))?;
    writeln!(out, "database = {}", quoted(database))?;
    writeln!(out, "\n[[source]]\nid = \"scada\"\nlayout = \"wide\"")?;
    writeln!(
        out,
        "time = {{ column = \"Timestamp\", format = \"%Y-%m-%d %H:%M:%S\", \
         time_zone = {}, repeated_hour = \"by-order\" }}",
        quoted(zone)
    )?;
    writeln!(out, "every = \"1 min\"\nexpected_every = \"1 h\"")?;
    writeln!(out, "bad_values = [\"Bad\", \"No reply\", \"-9999\"]")?;
    for train in &recipe.trains {
        write_train(out, recipe, train)?;
    }
    write_limits(out, recipe)?;
    writeln!(out, "\n[[procedure]]\nkind = \"clean_in_place\"\nsteps = [")?;
    for step in procedure_steps() {
        writeln!(out, "  {},", step_text(&step))?;
    }
    writeln!(out, "]")?;
    writeln!(out, "\n[integrity]\nalcr = 30\nvcf = 1.0\nhold_up_volume = \"900 L\"")?;
    let area = recipe.trains.first().map_or(0.0, |t| t.area_m2);
    let design = recipe.flux_at(recipe.start) * area * 3600.0;
    writeln!(out, "design_flow = \"{design:.0} m3/h\"")?;
    write_outlook(out, recipe)
}

fn write_train(out: &mut String, recipe: &Recipe, train: &TrainRecipe) -> fmt::Result {
    writeln!(out, "\n[[train]]\nid = {}", quoted(train.id.as_str()))?;
    writeln!(out, "name = {}", quoted(&train.name))?;
    writeln!(out, "asset = \"MT-{:02}01\"", train.loop_number)?;
    writeln!(out, "membrane_area = \"{} m2\"", train.area_m2)?;
    writeln!(out, "filtration = \"dead-end\"\ndrive = \"pressurised\"")?;
    let as_new = train.as_new_permeability() * LMH_BAR;
    writeln!(out, "as_new_permeability = \"{as_new:.1} L/(m2.h.bar)\"")?;
    writeln!(
        out,
        "after_clean_permeability = {{ from = \"{}\", value = \"{:.1} L/(m2.h.bar)\" }}",
        recipe.zone.date_text(train.after_clean_from),
        train.after_clean_permeability() * LMH_BAR
    )?;
    writeln!(out, "drinking_water = true\nclean_duration = \"8 h\"\nclean_notice = \"24 h\"")?;
    let tags = train.tags();
    writeln!(out, "\n[train.tags]")?;
    for (role, tag, unit) in [
        ("feed_pressure", tags.feed_pressure.as_str(), "bar"),
        ("permeate_pressure", tags.permeate_pressure.as_str(), "bar"),
        ("permeate_flow", tags.permeate_flow.as_str(), "m3/h"),
        ("temperature", THERMOMETER_TAG, "degC"),
    ] {
        writeln!(out, "{role} = {{ tag = {}, unit = \"{unit}\" }}", quoted(tag))?;
    }
    writeln!(
        out,
        "state = {{ tag = {}, filtration = [\"1\"], backwash = [\"2\"], \
         chemical_backwash = [\"3\"], clean_in_place = [\"4\"], integrity_test = [\"5\"], \
         standby = [\"0\"] }}",
        quoted(&tags.state)
    )?;
    writeln!(out, "\n[train.membrane_limits]\nph = \"2 .. 12\"")?;
    writeln!(out, "temperature = \"40 degC\"\nfree_chlorine = \"500 mg/L\"")
}

fn write_limits(out: &mut String, recipe: &Recipe) -> fmt::Result {
    let limits = &recipe.limits;
    let percent = |share: f64| (share * 1e4).round() / 1e2;
    writeln!(out, "\n[limits]")?;
    let loss = &limits.permeability_loss;
    writeln!(out, "permeability_loss_advisory = \"{} %\"", percent(loss.advisory))?;
    writeln!(out, "permeability_loss_clean = \"{} %\"", percent(loss.clean))?;
    for (name, pa) in [("advisory", limits.tmp_pa.advisory), ("clean", limits.tmp_pa.clean)] {
        if pa.is_finite() {
            writeln!(out, "tmp_{name} = \"{:.3} bar\"", pa * 1e-5)?;
        }
    }
    writeln!(out, "on_delay = \"{} min\"", limits.on_delay_us / crate::base::MINUTE_US)?;
    writeln!(out, "deadband = \"{} %\"", percent(limits.deadband))?;
    writeln!(out, "planning_horizon = \"{} h\"", limits.planning_horizon_us / HOUR_US)
}

/// The season in the middle of each month, as a site would know it from years before.
fn write_outlook(out: &mut String, recipe: &Recipe) -> fmt::Result {
    writeln!(out, "\n[outlook]\ntemperature = [")?;
    // Middle of January 1971, and on by twelfths of a mean year.
    let january = 365.0 + 15.5;
    for month in 0..12 {
        let days = january + 365.2425 / 12.0 * f64::from(month);
        let at = Instant::from_micros((days * DAY_US as f64) as i64);
        let degc = season_degc(&recipe.temperature, at);
        writeln!(out, "  {{ month = {}, value = \"{degc:.1} degC\" }},", month + 1)?;
    }
    writeln!(out, "]")
}

fn step_text(step: &Step) -> String {
    let mut parts = vec![format!("class = \"{}\"", class_name(step.class))];
    let mut put = |key: &str, value: Option<String>| {
        parts.extend(value.map(|v| format!("{key} = {v}")));
    };
    put("chemical", step.chemical.as_deref().map(quoted));
    put("concentration", step.concentration.as_deref().map(quoted));
    put("ph", step.ph.map(|ph| format!("{ph:?}")));
    put("temperature", step.temperature_degc.map(|t| format!("\"{t} degC\"")));
    put("duration", step.duration_us.map(|us| format!("\"{} h\"", us as f64 / HOUR_US as f64)));
    put("volume", step.volume_m3.map(|v| format!("\"{v} m3\"")));
    if let Some(check) = &step.verified {
        let ph = check.ph_range.map(|(low, high)| format!("ph = \"{low} .. {high}\""));
        let chlorine =
            check.free_chlorine_max_mg_l.map(|most| format!("free_chlorine_max = \"{most} mg/L\""));
        let limits: Vec<String> = ph.into_iter().chain(chlorine).collect();
        put("verified", Some(format!("{{ {} }}", limits.join(", "))));
    }
    format!("{{ {} }}", parts.join(", "))
}

fn class_name(class: StepClass) -> &'static str {
    match class {
        StepClass::Hypochlorite => "hypochlorite",
        StepClass::Alkali => "alkali",
        StepClass::Acid => "acid",
        StepClass::Peroxide => "peroxide",
        StepClass::Reductant => "reductant",
        StepClass::Detergent => "detergent",
        StepClass::Rinse => "rinse",
        StepClass::Other => "other",
    }
}

/// A TOML basic string.
fn quoted(text: &str) -> String {
    let mut out = String::from("\"");
    for c in text.chars() {
        match c {
            '"' => out.push_str("\\\""),
            '\\' => out.push_str("\\\\"),
            c if c.is_control() => out.push_str(&format!("\\u{:04X}", c as u32)),
            c => out.push(c),
        }
    }
    out.push('"');
    out
}
