//! Floor 2: physics and statistics on plain numbers, one method a file.
//!
//! Knows nothing of plants, trains, cycles or clocks. Every function states its unit, its range
//! and its source; one that cannot answer returns `None`. Values are SI, temperatures degrees
//! Celsius. `libm` stands in for the transcendental functions of `std`, whose last bits change
//! with the processor.

mod autocorrelation;
mod cake;
mod filtration;
mod normal;
mod polarisation;
mod regression;
mod robust;
mod start_of_cycle;
mod theil_sen;
mod trend_test;
mod water;

pub use autocorrelation::{Removed, autocorrelation, effective_number, lag1_autocorrelation};
pub use cake::{ConstantFlux, ConstantPressure, FilterConditions};
pub use filtration::{
    STANDARD_GRAVITY_M_S2, flux_m_s, hydrostatic_pa, permeability, permeability_of_resistance,
    resistance_1_m, resistance_of_permeability, tmp_cross_flow_pa, tmp_dead_end_pa,
    tmp_submerged_pa,
};
pub use normal::{normal_cdf, normal_quantile, student_t_cdf, student_t_quantile};
pub use polarisation::{GelLimit, wall_concentration};
pub use regression::{LineErrors, LineFit, fit_line};
pub use robust::{
    HampelPoint, MAD_TO_SIGMA, hampel, mad_sigma, median, median_in_place, quantile,
    weighted_median,
};
pub use start_of_cycle::{StartValue, start_value};
pub use theil_sen::{RobustLine, theil_sen};
pub use trend_test::{HamedRao, TrendTest, mann_kendall, mann_kendall_hamed_rao};
pub use water::{
    TemperatureLaw, UnknownTemperatureLaw, density_kg_m3, law_viscosity_pa_s, relative_viscosity,
    viscosity_pa_s,
};
