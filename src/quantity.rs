//! Quantities as newtypes: SI inside, the unit in the name of every way in and out, constructors `const`.
//!
//! Absolute pressure and pressure drop are different types, so neither can be passed for the other. Names and
//! symbols follow ISO 80000-4. Factors stand here and nowhere else; each is exact unless its line says otherwise.
//!
//! ```
//! use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature, VolumeFlow};
//! const LINE: AbsolutePressure = AbsolutePressure::from_kilopascals(101.325);
//! assert_eq!(LINE.as_pascals(), 101_325.0);
//! assert_eq!(Temperature::from_celsius(20.0).as_kelvin(), 293.15);
//! assert_eq!(PressureDrop::from_millibars(2.0).as_pascals(), 200.0);
//! assert_eq!(VolumeFlow::from_litres_per_minute(60.0).as_cubic_metres_per_second(), 0.001);
//! ```

/// A quantity that is one number in SI units; implemented by the types of this module and by nothing else.
///
/// It lets a sensor, a window or an output be written once and still take and give its own quantity only.
pub trait Quantity: Copy + PartialOrd + sealed::Sealed {
    /// From a value in the SI unit.
    fn from_si(value: f32) -> Self;
    /// The value in the SI unit.
    fn as_si(self) -> f32;
}

mod sealed {
    /// Keeps [`super::Quantity`] to this module.
    pub trait Sealed {}
}

/// Declares a quantity: its SI constructor and accessor, then a row for each further unit.
///
/// `times n` is a unit of n SI units, `per n` one of which n make an SI unit; both factors are exact in f32 or the
/// nearest to the exact value.
macro_rules! quantity {
    ($(#[$doc:meta])* $name:ident, $si:literal, $from_si:ident, $as_si:ident;
     $($unit:literal, $from:ident, $as:ident, $how:ident $factor:literal;)*) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, PartialOrd, Default)]
        #[cfg_attr(feature = "defmt", derive(defmt::Format))]
        #[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize), serde(transparent))]
        pub struct $name(f32);

        impl $name {
            #[doc = concat!("From a value in ", $si, ".")]
            pub const fn $from_si(value: f32) -> Self {
                Self(value)
            }
            #[doc = concat!("The value in ", $si, ".")]
            pub const fn $as_si(self) -> f32 {
                self.0
            }
            $(
                #[doc = concat!("From a value in ", $unit, ".")]
                pub const fn $from(value: f32) -> Self {
                    Self(quantity!(@from $how value, $factor))
                }
                #[doc = concat!("The value in ", $unit, ".")]
                pub const fn $as(self) -> f32 {
                    quantity!(@as $how self.0, $factor)
                }
            )*
        }

        impl sealed::Sealed for $name {}

        impl Quantity for $name {
            fn from_si(value: f32) -> Self {
                Self(value)
            }
            fn as_si(self) -> f32 {
                self.0
            }
        }
    };
    (@from times $v:expr, $f:literal) => { $v * $f };
    (@as times $v:expr, $f:literal) => { $v / $f };
    (@from per $v:expr, $f:literal) => { $v / $f };
    (@as per $v:expr, $f:literal) => { $v * $f };
}

quantity! {
    /// Pressure above vacuum, p.
    AbsolutePressure, "pascals", from_pascals, as_pascals;
    "kilopascals", from_kilopascals, as_kilopascals, times 1e3;
    "hectopascals", from_hectopascals, as_hectopascals, times 1e2;
    "bars", from_bars, as_bars, times 1e5;
    "pounds per square inch (absolute)", from_psi, as_psi, times 6_894.757;
}

impl AbsolutePressure {
    /// From a gauge reading and the barometric pressure at the same place.
    ///
    /// ```
    /// use evenbore::quantity::{AbsolutePressure, PressureDrop};
    /// let barometer = AbsolutePressure::from_hectopascals(987.0);
    /// let line = AbsolutePressure::from_gauge(PressureDrop::from_kilopascals(20.0), barometer);
    /// assert_eq!(line.as_kilopascals(), 118.7);
    /// ```
    pub const fn from_gauge(gauge: PressureDrop, barometric: AbsolutePressure) -> Self {
        Self(gauge.0 + barometric.0)
    }
}

quantity! {
    /// Difference of two pressures, upstream minus downstream; positive is forward flow.
    PressureDrop, "pascals", from_pascals, as_pascals;
    "kilopascals", from_kilopascals, as_kilopascals, times 1e3;
    "millibars", from_millibars, as_millibars, times 1e2;
    "conventional inches of water (249.08891 Pa)", from_inches_of_water, as_inches_of_water, times 249.088_91;
    "conventional millimetres of water (9.80665 Pa)", from_millimetres_of_water, as_millimetres_of_water, times 9.806_65;
    "pounds per square inch", from_psi, as_psi, times 6_894.757;
}

quantity! {
    /// Thermodynamic temperature, T.
    Temperature, "kelvin", from_kelvin, as_kelvin;
}

impl Temperature {
    /// From a value in degrees Celsius.
    pub const fn from_celsius(value: f32) -> Self {
        Self(value + 273.15)
    }
    /// The value in degrees Celsius.
    pub const fn as_celsius(self) -> f32 {
        self.0 - 273.15
    }
    /// From a value in degrees Fahrenheit.
    pub const fn from_fahrenheit(value: f32) -> Self {
        Self((value + 459.67) / 1.8)
    }
    /// The value in degrees Fahrenheit.
    pub const fn as_fahrenheit(self) -> f32 {
        self.0 * 1.8 - 459.67
    }
}

quantity! {
    /// Dynamic viscosity, mu.
    Viscosity, "pascal seconds", from_pascal_seconds, as_pascal_seconds;
    "millipascal seconds (centipoise)", from_millipascal_seconds, as_millipascal_seconds, per 1e3;
    "micropascal seconds", from_micropascal_seconds, as_micropascal_seconds, per 1e6;
}

impl Viscosity {
    /// Kinematic viscosity `nu = mu/rho` of the same fluid.
    pub const fn kinematic(self, density: Density) -> KinematicViscosity {
        KinematicViscosity(self.0 / density.0)
    }
}

quantity! {
    /// Kinematic viscosity, nu = mu/rho.
    KinematicViscosity, "square metres per second", from_square_metres_per_second, as_square_metres_per_second;
    "square millimetres per second (centistokes)", from_square_millimetres_per_second, as_square_millimetres_per_second, per 1e6;
}

quantity! {
    /// Density, rho.
    Density, "kilograms per cubic metre", from_kilograms_per_cubic_metre, as_kilograms_per_cubic_metre;
}

quantity! {
    /// Volume flow rate, q_V.
    VolumeFlow, "cubic metres per second", from_cubic_metres_per_second, as_cubic_metres_per_second;
    "cubic metres per hour", from_cubic_metres_per_hour, as_cubic_metres_per_hour, per 3.6e3;
    "litres per second", from_litres_per_second, as_litres_per_second, per 1e3;
    "litres per minute", from_litres_per_minute, as_litres_per_minute, per 6e4;
    "millilitres per minute", from_millilitres_per_minute, as_millilitres_per_minute, per 6e7;
}

quantity! {
    /// Mass flow rate, q_m.
    MassFlow, "kilograms per second", from_kilograms_per_second, as_kilograms_per_second;
    "kilograms per hour", from_kilograms_per_hour, as_kilograms_per_hour, per 3.6e3;
    "grams per second", from_grams_per_second, as_grams_per_second, per 1e3;
    "grams per minute", from_grams_per_minute, as_grams_per_minute, per 6e4;
    "milligrams per minute", from_milligrams_per_minute, as_milligrams_per_minute, per 6e7;
}

quantity! {
    /// Length: bores, gaps, channel lengths.
    Length, "metres", from_metres, as_metres;
    "millimetres", from_millimetres, as_millimetres, per 1e3;
    "micrometres", from_micrometres, as_micrometres, per 1e6;
}

quantity! {
    /// Relative humidity, a fraction 0 to 1 of saturation over water.
    RelativeHumidity, "the fraction of saturation", from_fraction, as_fraction;
    "percent", from_percent, as_percent, per 1e2;
}

quantity! {
    /// Electrical resistance, R.
    Resistance, "ohms", from_ohms, as_ohms;
    "kilohms", from_kilohms, as_kilohms, times 1e3;
}

quantity! {
    /// Electric current, I.
    Current, "amperes", from_amperes, as_amperes;
    "milliamperes", from_milliamperes, as_milliamperes, per 1e3;
}
