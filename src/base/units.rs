//! Stub to be replaced.
/// A dimension.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[expect(missing_docs, reason = "stub")]
pub enum Dimension {
    Pressure,
    Flow,
    Area,
    Flux,
    Permeability,
    Resistance,
    Temperature,
    Time,
    Length,
    Volume,
    Concentration,
    Turbidity,
    Share,
    Ph,
}
/// A unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unit {
    /** code */
    pub ucum: &'static str,
    /** label */
    pub label: &'static str,
    /** dim */
    pub dimension: Dimension,
    /** SI = value * factor + offset */
    pub factor: f64,
    /** see factor */
    pub offset: f64,
}
