//! Property tables that come with the program: fluids over temperature at 101325 Pa, and solids near 300 K.
//! Sources stand beside each table in `assets/properties/README.md` and in [`FluidTable::source`].

use super::Fluid;
use std::sync::LazyLock;

/// Why a table gives no properties.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum TableError {
    /// No table of this name.
    #[error("there is no property table \"{name}\"; tables: {known}")]
    Unknown {
        /// What was asked for.
        name: String,
        /// What there is.
        known: String,
    },
    /// Outside of the table.
    #[error(
        "{temperature_k} K is outside of the table of {name}, {low_k} K to {high_k} K: choose a temperature inside or type the properties"
    )]
    OutOfRange {
        /// Table.
        name: &'static str,
        /// Temperature asked for, K.
        temperature_k: f64,
        /// Lowest temperature of the table, K.
        low_k: f64,
        /// Highest, K.
        high_k: f64,
    },
}

/// One temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Row {
    /// T, K.
    temperature_k: f64,
    /// rho, kg/m^3.
    density_kg_m3: f64,
    /// mu, Pa s.
    viscosity_pa_s: f64,
    /// k, W/(m K).
    conductivity_w_m_k: f64,
    /// c_p, J/(kg K).
    heat_capacity_j_kg_k: f64,
}

/// Properties of a fluid over temperature.
#[derive(Clone, Debug, PartialEq)]
pub struct FluidTable {
    name: &'static str,
    source: &'static str,
    /// At least two, temperature increasing.
    rows: Vec<Row>,
}

impl FluidTable {
    fn read(name: &'static str, source: &'static str, text: &str) -> Self {
        let rows = text.lines().skip(1).filter_map(|line| {
            let mut numbers = line.split(',').map_while(|cell| cell.trim().parse().ok());
            Some(Row {
                temperature_k: numbers.next()?,
                density_kg_m3: numbers.next()?,
                viscosity_pa_s: numbers.next()?,
                conductivity_w_m_k: numbers.next()?,
                heat_capacity_j_kg_k: numbers.next()?,
            })
        });
        Self {
            name,
            source,
            rows: rows.collect(),
        }
    }

    /// Name for the user, such as `air, dry`.
    pub fn name(&self) -> &'static str {
        self.name
    }

    /// Where the numbers come from.
    pub fn source(&self) -> &'static str {
        self.source
    }

    /// Lowest and highest temperature, K.
    pub fn range_k(&self) -> [f64; 2] {
        [
            self.rows[0].temperature_k,
            self.rows[self.rows.len() - 1].temperature_k,
        ]
    }

    /// Properties at a temperature, K.
    ///
    /// Between two rows rho, k and c_p are linear in T, and mu follows `ln mu = a + b/T` (Andrade, 1934, from
    /// memory), both monotone where the rows are.
    ///
    /// # Errors
    /// [`TableError::OutOfRange`].
    pub fn at(&self, temperature_k: f64) -> Result<Fluid, TableError> {
        let (low, high) = self.span(temperature_k)?;
        let t = (temperature_k - low.temperature_k) / (high.temperature_k - low.temperature_k);
        let linear = |a: f64, b: f64| a + (b - a) * t;
        // Position between the rows in 1/T.
        let s = t * high.temperature_k / temperature_k;
        let logarithm = low.viscosity_pa_s.ln() * (1.0 - s) + high.viscosity_pa_s.ln() * s;
        let at_row = [low, high]
            .into_iter()
            .find(|r| r.temperature_k == temperature_k);
        Ok(Fluid {
            name: format!("{} at {temperature_k} K", self.name),
            density_kg_m3: linear(low.density_kg_m3, high.density_kg_m3),
            viscosity_pa_s: at_row.map_or(logarithm.exp(), |r| r.viscosity_pa_s),
            conductivity_w_m_k: linear(low.conductivity_w_m_k, high.conductivity_w_m_k),
            heat_capacity_j_kg_k: linear(low.heat_capacity_j_kg_k, high.heat_capacity_j_kg_k),
        })
    }

    /// Thermal expansion `beta = -(d rho/dT)/rho` of the span between rows, 1/K.
    ///
    /// # Errors
    /// [`TableError::OutOfRange`].
    pub fn expansion_per_k(&self, temperature_k: f64) -> Result<f64, TableError> {
        let (low, high) = self.span(temperature_k)?;
        let slope =
            (high.density_kg_m3 - low.density_kg_m3) / (high.temperature_k - low.temperature_k);
        Ok(-slope / self.at(temperature_k)?.density_kg_m3)
    }

    fn span(&self, temperature_k: f64) -> Result<(Row, Row), TableError> {
        let [low_k, high_k] = self.range_k();
        if !(low_k..=high_k).contains(&temperature_k) {
            return Err(TableError::OutOfRange {
                name: self.name,
                temperature_k,
                low_k,
                high_k,
            });
        }
        let after = self
            .rows
            .partition_point(|r| r.temperature_k <= temperature_k);
        let i = after.clamp(1, self.rows.len() - 1);
        Ok((self.rows[i - 1], self.rows[i]))
    }
}

static FLUIDS: LazyLock<Vec<FluidTable>> = LazyLock::new(|| {
    vec![
        FluidTable::read(
            "air, dry",
            "Lemmon et al., J. Phys. Chem. Ref. Data 29 (2000); Lemmon and Jacobsen, Int. J. Thermophys. 25 (2004); by CoolProp",
            include_str!("../../assets/properties/air.csv"),
        ),
        FluidTable::read(
            "water",
            "IAPWS-95 (Wagner and Pruss, 2002), Huber et al. (2009, 2012); by CoolProp",
            include_str!("../../assets/properties/water.csv"),
        ),
        FluidTable::read(
            "ethylene glycol in water, 50 % by mass",
            "Melinder, Properties of Secondary Working Fluids (IIR, 2010); by CoolProp",
            include_str!("../../assets/properties/glycol_water_50_mass.csv"),
        ),
        FluidTable::read(
            "engine oil, unused",
            "Incropera and DeWitt, Fundamentals of Heat and Mass Transfer, table A.5 (from memory)",
            include_str!("../../assets/properties/engine_oil_unused.csv"),
        ),
    ]
});

/// All fluids, for a picker.
pub fn fluids() -> &'static [FluidTable] {
    &FLUIDS
}

/// A fluid by the name of its table, at a temperature in K.
///
/// # Errors
/// [`TableError`].
pub fn fluid(name: &str, temperature_k: f64) -> Result<Fluid, TableError> {
    let table = fluids().iter().find(|t| t.name == name).ok_or_else(|| {
        let known: Vec<_> = fluids().iter().map(FluidTable::name).collect();
        TableError::Unknown {
            name: name.to_owned(),
            known: known.join("; "),
        }
    })?;
    table.at(temperature_k)
}

/// A solid near room temperature.
#[derive(Clone, Debug, PartialEq)]
pub struct SolidRow {
    /// Name for the user.
    pub name: String,
    /// Temperature of the figures, K.
    pub temperature_k: f64,
    /// Conductivity, W/(m K).
    pub conductivity_w_m_k: f64,
    /// Density, kg/m^3.
    pub density_kg_m3: f64,
    /// Heat capacity, J/(kg K).
    pub heat_capacity_j_kg_k: f64,
    /// Where the numbers come from.
    pub source: String,
}

static SOLIDS: LazyLock<Vec<SolidRow>> = LazyLock::new(|| {
    let text = include_str!("../../assets/properties/solids.csv");
    let rows = text.lines().skip(1).filter_map(|line| {
        let (figures, source) = line.split_once(",\"")?;
        let mut cells = figures.split(',');
        let name = cells.next()?.to_owned();
        let mut number = || cells.next()?.trim().parse().ok();
        Some(SolidRow {
            name,
            temperature_k: number()?,
            conductivity_w_m_k: number()?,
            density_kg_m3: number()?,
            heat_capacity_j_kg_k: number()?,
            source: source.trim_end_matches('"').to_owned(),
        })
    });
    rows.collect()
});

/// All solids, for a picker.
pub fn solids() -> &'static [SolidRow] {
    &SOLIDS
}

#[cfg(test)]
mod tests {
    use super::*;

    fn relative(value: f64, reference: f64) -> f64 {
        (value / reference - 1.0).abs()
    }

    #[test]
    fn every_row_is_read() {
        let counts: Vec<usize> = fluids().iter().map(|t| t.rows.len()).collect();
        assert_eq!(counts, [21, 20, 26, 14]);
        assert_eq!(solids().len(), 9);
        for table in fluids() {
            assert!(
                table
                    .rows
                    .windows(2)
                    .all(|r| r[0].temperature_k < r[1].temperature_k)
            );
        }
    }

    /// Prandtl numbers at 300 K computed by CoolProp from the formulations named in the tables' sources.
    #[test]
    fn prandtl_numbers_at_300_k() {
        for (name, prandtl) in [
            ("air, dry", 0.70706),
            ("water", 5.85593),
            ("ethylene glycol in water, 50 % by mass", 25.416),
        ] {
            let error = relative(fluid(name, 300.0).expect("in range").prandtl(), prandtl);
            assert!(error < 1e-4, "{name}: {error}");
        }
    }

    /// Water between rows. Viscosity 889.735 uPa s at 298.15 K and 998 kg/m^3: IAPWS R12-08, table 4; density
    /// 997.047 kg/m^3 and conductivity 0.6065 W/(m K) at 298.15 K: IAPWS-95 and R15-11 (from memory).
    #[test]
    fn water_between_rows_agrees_with_the_release() {
        let water = fluid("water", 298.15).expect("in range");
        let errors = |bend: f64| {
            [
                relative(water.viscosity_pa_s * bend, 889.735e-6),
                relative(water.density_kg_m3, 997.047),
                relative(water.conductivity_w_m_k, 0.6065),
            ]
        };
        let sound = |e: [f64; 3]| e[0] < 1e-3 && e[1] < 5e-5 && e[2] < 1e-3;
        assert!(sound(errors(1.0)), "{:?}", errors(1.0));
        // Flawed twin: viscosity linear in T is 1.6 per mille off in the middle of this span.
        let table = &fluids()[1];
        let (a, b) = table.span(298.15).expect("in range");
        let t = (298.15 - a.temperature_k) / (b.temperature_k - a.temperature_k);
        let linear = a.viscosity_pa_s + (b.viscosity_pa_s - a.viscosity_pa_s) * t;
        assert!(!sound(errors(linear / water.viscosity_pa_s)));
    }

    #[test]
    fn rows_are_met_exactly_and_ends_belong_to_the_table() {
        for table in fluids() {
            for row in &table.rows {
                let fluid = table.at(row.temperature_k).expect("in range");
                assert_eq!(fluid.viscosity_pa_s, row.viscosity_pa_s);
                assert!(relative(fluid.density_kg_m3, row.density_kg_m3) < 1e-15);
            }
        }
    }

    #[test]
    fn outside_of_the_table_is_refused() {
        for kelvin in [249.9, 450.1, f64::NAN] {
            assert!(matches!(
                fluid("air, dry", kelvin),
                Err(TableError::OutOfRange { .. })
            ));
        }
        assert!(matches!(
            fluid("treacle", 300.0),
            Err(TableError::Unknown { .. })
        ));
    }

    /// An ideal gas has beta = 1/T; air near room temperature to about a per cent.
    #[test]
    fn air_expands_nearly_as_an_ideal_gas() {
        let beta = fluids()[0].expansion_per_k(305.0).expect("in range");
        assert!(relative(beta, 1.0 / 305.0) < 0.01, "{beta}");
    }
}
