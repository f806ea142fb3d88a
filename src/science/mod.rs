//! stub
/// How viscosity follows temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum TemperatureLaw {
    /// IAPWS SR6-08(2011).
    Iapws,
}
