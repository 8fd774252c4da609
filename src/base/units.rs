//! Units of text: one table of what can be typed and what is shown. Inside the program all is SI and kelvin.
//!
//! Factors: NIST Special Publication 811 (2008), appendix B; conventional inch of water at 4 C.

/// Kind of a quantity.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// Length, m.
    Length,
    /// Area, m^2.
    Area,
    /// Velocity, m/s.
    Velocity,
    /// Pressure, Pa.
    Pressure,
    /// Temperature, K.
    Temperature,
    /// Temperature difference, K.
    TemperatureDifference,
    /// Flow rate per depth, m^2/s.
    FlowRate,
    /// Power per depth, W/m.
    Power,
    /// Force per depth, N/m.
    Force,
    /// Heat flux, W/m^2.
    Flux,
    /// Heat transfer coefficient, W/(m^2 K).
    Coefficient,
    /// Heat source, W/m^3.
    Source,
    /// Density, kg/m^3.
    Density,
    /// Viscosity, Pa s.
    Viscosity,
    /// Conductivity, W/(m K).
    Conductivity,
    /// Heat capacity, J/(kg K).
    HeatCapacity,
    /// Angle, rad.
    Angle,
    /// A plain number.
    Number,
}

/// A unit: SI = factor * number + offset.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unit {
    /// Symbol as shown.
    pub symbol: &'static str,
    /// Other spellings accepted.
    pub also: &'static [&'static str],
    /// SI per unit.
    pub factor: f64,
    /// SI at zero.
    pub offset: f64,
}

const fn unit(symbol: &'static str, also: &'static [&'static str], factor: f64) -> Unit {
    Unit {
        symbol,
        also,
        factor,
        offset: 0.0,
    }
}

const LENGTH: &[Unit] = &[
    unit("mm", &[], 1e-3),
    unit("in", &["inch", "\""], 0.0254),
    unit("m", &[], 1.0),
    unit("cm", &[], 1e-2),
    unit("um", &["µm", "micron"], 1e-6),
    unit("mil", &["thou"], 2.54e-5),
    unit("ft", &[], 0.3048),
];
const AREA: &[Unit] = &[
    unit("mm²", &["mm2", "mm^2"], 1e-6),
    unit("in²", &["in2", "in^2"], 6.4516e-4),
    unit("m²", &["m2", "m^2"], 1.0),
    unit("cm²", &["cm2", "cm^2"], 1e-4),
];
const VELOCITY: &[Unit] = &[
    unit("m/s", &[], 1.0),
    unit("ft/s", &["fps"], 0.3048),
    unit("mm/s", &[], 1e-3),
    unit("ft/min", &["fpm"], 0.00508),
];
const PRESSURE: &[Unit] = &[
    unit("Pa", &[], 1.0),
    unit("inH2O", &["inH₂O", "inwg"], 249.0889),
    unit("kPa", &[], 1e3),
    unit("mbar", &[], 100.0),
    unit("bar", &[], 1e5),
    unit("mmH2O", &["mmH₂O"], 9.80665),
    unit("psi", &[], 6894.757),
];
const TEMPERATURE: &[Unit] = &[
    Unit {
        symbol: "°C",
        also: &["C", "degC"],
        factor: 1.0,
        offset: 273.15,
    },
    Unit {
        symbol: "°F",
        also: &["F", "degF"],
        factor: 5.0 / 9.0,
        offset: 459.67 * 5.0 / 9.0,
    },
    unit("K", &[], 1.0),
];
const DIFFERENCE: &[Unit] = &[unit("K", &["°C", "C"], 1.0), unit("°F", &["F"], 5.0 / 9.0)];
const FLOW_RATE: &[Unit] = &[
    unit("cm²/s", &["cm2/s", "cm^2/s"], 1e-4),
    unit("ft²/min", &["ft2/min", "cfm/ft"], 0.09290304 / 60.0),
    unit("m²/s", &["m2/s", "m^2/s"], 1.0),
    unit("l/min", &["l/min/m", "L/min"], 1e-3 / 60.0),
    unit("l/s", &["l/s/m", "L/s"], 1e-3),
    unit("m³/h", &["m3/h"], 1.0 / 3600.0),
];
const POWER: &[Unit] = &[
    unit("W/m", &[], 1.0),
    unit("Btu/(h ft)", &["Btu/h/ft"], 0.961_520),
    unit("mW/m", &[], 1e-3),
    unit("kW/m", &[], 1e3),
];
const FORCE: &[Unit] = &[
    unit("mN/m", &[], 1e-3),
    unit("lbf/ft", &[], 14.593_90),
    unit("N/m", &[], 1.0),
];
const FLUX: &[Unit] = &[
    unit("W/m²", &["W/m2", "W/m^2"], 1.0),
    unit("Btu/(h ft²)", &["Btu/h/ft2"], 3.154_591),
    unit("W/cm²", &["W/cm2", "W/cm^2"], 1e4),
    unit("kW/m²", &["kW/m2"], 1e3),
];
const COEFFICIENT: &[Unit] = &[
    unit("W/(m² K)", &["W/m2/K", "W/m2K", "W/(m2 K)"], 1.0),
    unit("Btu/(h ft² °F)", &["Btu/h/ft2/F"], 5.678_263),
];
const SOURCE: &[Unit] = &[
    unit("W/m³", &["W/m3", "W/m^3"], 1.0),
    unit("Btu/(h ft³)", &["Btu/h/ft3"], 10.349_71),
    unit("W/cm³", &["W/cm3", "W/cm^3"], 1e6),
];
const DENSITY: &[Unit] = &[
    unit("kg/m³", &["kg/m3", "kg/m^3"], 1.0),
    unit("lb/ft³", &["lb/ft3"], 16.018_46),
    unit("g/cm³", &["g/cm3"], 1e3),
];
const VISCOSITY: &[Unit] = &[
    unit("mPa s", &["cP", "mPas"], 1e-3),
    unit("lb/(ft s)", &["lb/ft/s"], 1.488_164),
    unit("Pa s", &["Pas"], 1.0),
];
const CONDUCTIVITY: &[Unit] = &[
    unit("W/(m K)", &["W/m/K", "W/mK"], 1.0),
    unit("Btu/(h ft °F)", &["Btu/h/ft/F"], 1.730_735),
];
const HEAT_CAPACITY: &[Unit] = &[
    unit("J/(kg K)", &["J/kg/K", "J/kgK"], 1.0),
    unit("Btu/(lb °F)", &["Btu/lb/F"], 4186.8),
    unit("kJ/(kg K)", &["kJ/kg/K"], 1e3),
];
const ANGLE: &[Unit] = &[
    unit("°", &["deg"], std::f64::consts::PI / 180.0),
    unit("rad", &[], 1.0),
];
const NUMBER: &[Unit] = &[unit("", &[], 1.0)];

impl Kind {
    /// Units that may be typed; the first is shown with SI, the second (where there is one) with inches.
    pub fn units(self) -> &'static [Unit] {
        match self {
            Self::Length => LENGTH,
            Self::Area => AREA,
            Self::Velocity => VELOCITY,
            Self::Pressure => PRESSURE,
            Self::Temperature => TEMPERATURE,
            Self::TemperatureDifference => DIFFERENCE,
            Self::FlowRate => FLOW_RATE,
            Self::Power => POWER,
            Self::Force => FORCE,
            Self::Flux => FLUX,
            Self::Coefficient => COEFFICIENT,
            Self::Source => SOURCE,
            Self::Density => DENSITY,
            Self::Viscosity => VISCOSITY,
            Self::Conductivity => CONDUCTIVITY,
            Self::HeatCapacity => HEAT_CAPACITY,
            Self::Angle => ANGLE,
            Self::Number => NUMBER,
        }
    }

    /// Unit in which values are shown.
    pub fn shown(self, inch_based: bool) -> &'static Unit {
        let units = self.units();
        if inch_based && units.len() > 1 && !matches!(self, Self::Angle) {
            &units[1]
        } else {
            &units[0]
        }
    }

    /// Number in the shown unit.
    pub fn number(self, si: f64, inch_based: bool) -> f64 {
        let unit = self.shown(inch_based);
        (si - unit.offset) / unit.factor
    }

    /// Value with its unit, four significant digits.
    pub fn text(self, si: f64, inch_based: bool) -> String {
        let number = self.number(si, inch_based);
        let digits = if matches!(self, Self::Temperature) {
            5
        } else {
            4
        };
        let symbol = self.shown(inch_based).symbol;
        let space = if symbol.is_empty() || symbol == "°" {
            ""
        } else {
            " "
        };
        format!("{}{space}{symbol}", significant(number, digits))
    }

    /// SI value of typed text: a number with or without a unit (the shown one, when without).
    ///
    /// # Errors
    /// [`UnitError`] with what is understood.
    pub fn parse(self, text: &str, inch_based: bool) -> Result<f64, UnitError> {
        let text = text.trim().replace(',', ".");
        let split = text
            .char_indices()
            .find(|&(i, c)| {
                let exponent = (c == 'e' || c == 'E')
                    && i > 0
                    && text[i + 1..]
                        .starts_with(|d: char| d.is_ascii_digit() || d == '-' || d == '+');
                !(c.is_ascii_digit() || matches!(c, '.' | '-' | '+') || exponent)
            })
            .map_or(text.len(), |(i, _)| i);
        let (number, symbol) = (text[..split].trim(), text[split..].trim());
        let number: f64 = number
            .parse()
            .map_err(|_| UnitError::Number { text: text.clone() })?;
        let unit = if symbol.is_empty() {
            self.shown(inch_based)
        } else {
            let same = |u: &&Unit| u.symbol == symbol || u.also.contains(&symbol);
            self.units()
                .iter()
                .find(same)
                .ok_or_else(|| UnitError::Unit {
                    symbol: symbol.into(),
                    known: self
                        .units()
                        .iter()
                        .map(|u| u.symbol)
                        .collect::<Vec<_>>()
                        .join(", "),
                })?
        };
        let si = unit.factor * number + unit.offset;
        if si.is_finite() {
            Ok(si)
        } else {
            Err(UnitError::Number { text })
        }
    }
}

/// Text that is no quantity.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum UnitError {
    /// No number.
    #[error("\"{text}\" is not a number; type for example 4 or 4e-3, with or without a unit")]
    Number {
        /// What was typed.
        text: String,
    },
    /// Unknown unit.
    #[error("the unit \"{symbol}\" is not known here; use one of {known}")]
    Unit {
        /// What was typed.
        symbol: String,
        /// What is known.
        known: String,
    },
}

/// A number with so many significant digits, without a needless exponent.
pub fn significant(value: f64, digits: usize) -> String {
    if value == 0.0 {
        return "0".into();
    }
    if !value.is_finite() {
        return "-".into();
    }
    let exponent = value.abs().log10().floor() as i32;
    if (-4..7).contains(&exponent) {
        let decimals = (digits as i32 - 1 - exponent).max(0) as usize;
        format!("{value:.decimals$}")
    } else {
        format!("{value:.*e}", digits - 1)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn typed_units_are_understood() {
        let close = |kind: Kind, text: &str, si: f64| {
            let value = kind.parse(text, false).unwrap();
            assert!((value / si - 1.0).abs() < 1e-6, "{text}: {value}");
        };
        close(Kind::Length, "4 mm", 4e-3);
        close(Kind::Length, "4", 4e-3);
        close(Kind::Length, "0.2in", 5.08e-3);
        close(Kind::Length, "1e-3 m", 1e-3);
        close(Kind::FlowRate, "12 l/min", 2e-4);
        close(Kind::Pressure, "0.05 inH2O", 12.454445);
        close(Kind::Temperature, "35 °C", 308.15);
        close(Kind::Temperature, "95 F", 308.15);
        close(Kind::Temperature, "308.15 K", 308.15);
        assert!((Kind::Length.parse("0.5", true).unwrap() - 0.0127).abs() < 1e-12);
        assert!(
            Kind::Length.parse("4 parsec", false).is_err()
                && Kind::Length.parse("x", false).is_err()
        );
        assert!(
            Kind::Length.parse("1e999", false).is_err() && Kind::Length.parse("", false).is_err()
        );
    }

    #[test]
    fn values_are_shown_with_their_unit() {
        assert_eq!(Kind::Length.text(4e-3, false), "4.000 mm");
        assert_eq!(Kind::Temperature.text(313.15, false), "40.000 °C");
        assert_eq!(Kind::Pressure.text(0.0, false), "0 Pa");
        assert_eq!(significant(123456.0, 4), "123456");
        assert_eq!(significant(1.5e-9, 4), "1.500e-9");
    }

    /// NIST SP 811: 1 in = 25.4 mm; 1 Btu/(h ft) is 1055.056 J / 3600 s / 0.3048 m.
    #[test]
    fn factors_are_those_of_the_standard() {
        assert!((1055.05585262 / 3600.0 / 0.3048 / POWER[1].factor - 1.0).abs() < 1e-5);
        assert!((1055.05585262 / 3600.0 / 0.09290304 / FLUX[1].factor - 1.0).abs() < 1e-5);
    }
}
