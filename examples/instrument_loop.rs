//! One turn after another of an instrument: raw words to pressure, flow, health, totals and outputs, with a wire that
//! breaks on the way.

use evenbore::conditioning::{Cutoff, Damping};
use evenbore::conditions::Sample;
use evenbore::fluid::catalogue::NITROGEN;
use evenbore::health::{Causes, Mapping, assess};
use evenbore::output::{CurrentLoop, PulseOutput, current_loop::FailureLevel};
use evenbore::quantity::{AbsolutePressure, Length, MassFlow, PressureDrop, Resistance, VolumeFlow};
use evenbore::sensor::ratiometric::RawRatio;
use evenbore::sensor::resistance::ResistanceInput;
use evenbore::sensor::transducer::{ByteOrder, RawWord, StatusBits, WordFormat};
use evenbore::sensor::{Fault, Pt100, Ratiometric, Transducer};
use evenbore::total::Totals;
use evenbore::{Element, Meter, Reading, Status};

/// The three sensors of the instrument.
struct Sensors {
    pressure_drop: Transducer<PressureDrop>,
    line_pressure: Ratiometric<AbsolutePressure>,
    resistance: ResistanceInput,
    thermometer: Pt100,
}

impl Sensors {
    fn reading(&self, drop: RawWord, pressure: RawRatio, temperature: RawRatio) -> Result<Reading, Fault> {
        let resistance = self.resistance.read(temperature)?;
        Ok(Reading::new(
            self.pressure_drop.read(drop)?,
            self.thermometer.temperature(resistance)?,
            self.line_pressure.read(pressure)?,
        ))
    }
}

fn main() -> Result<(), Box<dyn core::error::Error>> {
    let status = StatusBits { mask: 0xC000, good: 0x0000, stale: Some(0x8000) };
    let format = WordFormat::new(2, 14, ByteOrder::BigEndian)?.with_status(status)?;
    let pa = PressureDrop::from_pascals;
    let share = |share, kilopascals| (share, AbsolutePressure::from_kilopascals(kilopascals));
    let sensors = Sensors {
        pressure_drop: Transducer::new(format, (1638, pa(0.0)), (14_745, pa(2500.0)))?,
        line_pressure: Ratiometric::new(share(0.1, 0.0), share(0.9, 250.0))?,
        resistance: ResistanceInput::series(Resistance::from_ohms(400.0))?,
        thermometer: Pt100::default(),
    };
    let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?;
    let meter = Meter::nominal(element, NITROGEN.fluid())?.with_standing(Status::empty());

    let mut cutoff = Cutoff::new(MassFlow::from_milligrams_per_minute(5.0), MassFlow::from_milligrams_per_minute(8.0))?;
    let mut damping = Damping::new(1.0)?;
    let mut totals = Totals::default();
    let mut pulses = PulseOutput::new(1_000_000, 20, 20)?;
    let litres = VolumeFlow::from_litres_per_minute;
    let current_loop = CurrentLoop::new(litres(0.0), litres(10.0), FailureLevel::Low)?;

    let (pressure, good, broken) = (
        RawRatio { signal: 2048, supply: 4096 },
        RawRatio { signal: 2729, supply: 10_000 },
        RawRatio { signal: 9, supply: 0 },
    );
    for turn in 0..6 {
        let raw = format.word(&(8000_u16 + 10 * turn).to_be_bytes()).ok_or(Fault::Invalid)?;
        let temperature = if turn < 4 { good } else { broken };
        let measure = || -> Result<Sample, Causes> { Ok(*meter.flow(&sensors.reading(raw, pressure, temperature)?)?) };
        let assessed = assess(measure(), Causes::empty(), &Mapping::default());
        let before = totals.volume().forward;
        let shown = assessed.shown().map(|sample| cutoff.apply(sample));
        if let Some(sample) = &shown {
            totals.add(sample, 100)?;
        }
        pulses.add(totals.volume().forward.since(&before));
        let damped = shown.and_then(|sample| damping.update(sample.volume, 100));
        let current = current_loop.current(damped);
        println!(
            "{turn}: {} ({}), {:.3} mA, {} nl, pulse {}",
            assessed.category(),
            assessed.causes(),
            current.as_milliamperes(),
            totals.volume().net(),
            pulses.step(100)
        );
    }
    Ok(())
}
