//! An aim as a number to be minimised, with its words.

use super::Aim;
use crate::physics::State;
use crate::physics::figures::{self, PeakScale, Ports};
use crate::physics::measures::Measured;

impl Aim {
    /// In words, for tables and titles.
    pub fn words(&self) -> &'static str {
        match self {
            Self::MostHeat {} => "most heat from the inserts",
            Self::LeastTotalPressureLoss {} => "least total pressure loss",
            Self::LeastPumpingPower {} => "least pumping power",
            Self::MostHeatPerPumpingPower {} => "most heat per pumping power",
            Self::LeastPeakTemperature {} => "least peak surface temperature",
            Self::LeastDrag {} => "least drag",
        }
    }

    /// SI unit of its value.
    pub fn unit(&self) -> &'static str {
        match self {
            Self::MostHeat {} | Self::LeastPumpingPower {} => "W/m",
            Self::LeastTotalPressureLoss {} => "Pa",
            Self::MostHeatPerPumpingPower {} => "1",
            Self::LeastPeakTemperature {} => "K",
            Self::LeastDrag {} => "N/m",
        }
    }

    /// Whether more is better.
    pub fn is_most(&self) -> bool {
        matches!(self, Self::MostHeat {} | Self::MostHeatPerPumpingPower {})
    }

    /// All aims, for pickers.
    pub fn all() -> [Self; 6] {
        [
            Self::MostHeat {},
            Self::LeastTotalPressureLoss {},
            Self::LeastPumpingPower {},
            Self::MostHeatPerPumpingPower {},
            Self::LeastPeakTemperature {},
            Self::LeastDrag {},
        ]
    }

    /// Value of a state with its derivatives, SI.
    pub(super) fn measure(&self, state: &State, peak: &PeakScale) -> Measured {
        match self {
            Self::MostHeat {} => figures::heat(state),
            Self::LeastTotalPressureLoss {} => {
                figures::total_pressure_drop(state, &Ports::new(state))
            }
            Self::LeastPumpingPower {} => figures::pumping_power(state, &Ports::new(state)),
            Self::MostHeatPerPumpingPower {} => {
                figures::heat_per_pumping_power(state, &Ports::new(state))
            }
            Self::LeastPeakTemperature {} => figures::peak_temperature(state, peak),
            Self::LeastDrag {} => figures::drag(state, [1.0, 0.0]),
        }
    }
}
