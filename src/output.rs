//! Outputs: current loop, pulses, alarms, and the simulation of each.
//!
//! What a value cannot be given for arrives here as `None`: the loop goes to its failure level, an alarm is raised, no
//! pulse is made. With feature `hal` each output drives a pin or a duty cycle of `embedded-hal`.

pub mod current_loop; // 4 to 20 mA with failure levels

pub mod pulse; // a pulse per amount, none lost

pub mod alarm; // limit with hysteresis and delay

pub mod simulation; // a value in place of the measured one

pub use alarm::Alarm;
pub use current_loop::CurrentLoop;
pub use pulse::PulseOutput;
pub use simulation::Simulation;
