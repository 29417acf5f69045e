//! One step of the march: Newton's method for velocity and pressure, then temperature, until all settle.

use super::channel::{Channel, Scales, Wall};
use super::grid::Grid;
use super::profile::{Carried, Profile};
use super::refused::Refused;
use super::substance::State;
use nalgebra::{DMatrix, DVector};

/// Rounds of a step.
const ROUNDS: usize = 40;
/// Relative change after which no further round is needed: the next would be a hundred times smaller.
const SETTLED: f64 = 1e-7;
/// Slip and jump lengths never below this share of the hydraulic diameter: a wall without slip.
const NO_SLIP: f64 = 1e-9;

/// What earlier positions contribute to the differences along z.
pub(crate) struct Past {
    /// Weight of the new position, 1/m.
    lead: f64,
    mass: DVector<f64>,
    momentum: DVector<f64>,
    energy: DVector<f64>,
    loss: f64,
}

impl Past {
    /// Sums weighted past positions; the first weight is that of the new position.
    pub fn new(weights: &[f64], past: &[(Profile, Carried)]) -> Self {
        let n = past[0].1.mass.len();
        let zero = DVector::zeros(n);
        let mut sum = Self { lead: weights[0], mass: zero.clone(), momentum: zero.clone(), energy: zero, loss: 0.0 };
        for (&weight, (profile, carried)) in weights[1..].iter().zip(past) {
            sum.mass.axpy(weight, &carried.mass, 1.0);
            sum.momentum.axpy(weight, &carried.momentum, 1.0);
            sum.energy.axpy(weight, &carried.energy, 1.0);
            sum.loss += weight * profile.loss;
        }
        sum
    }
}

/// One step: the channel, its units, the grid and the past.
pub(crate) struct Step<'a> {
    pub channel: &'a Channel<'a>,
    pub scales: &'a Scales,
    pub grid: &'a Grid,
    pub past: &'a Past,
}

impl Step<'_> {
    /// Improves a guess until it obeys the equations.
    ///
    /// # Errors
    /// The pressure falls to vacuum, the state leaves the fluid's table, or the rounds do not settle.
    pub fn solve(&self, guess: Profile) -> Result<Profile, Refused> {
        let mut profile = guess;
        let mut change = f64::INFINITY;
        for _ in 0..ROUNDS {
            self.refresh(&mut profile)?;
            change = self.improve_velocity(&mut profile)?;
            if self.channel.wall != Wall::UnlimitedCapacity {
                self.refresh(&mut profile)?;
                change = change.max(self.improve_temperature(&mut profile)?);
            }
            if change < SETTLED {
                self.refresh(&mut profile)?;
                let pressure = self.scales.pressure_at(profile.loss);
                for &temperature in profile.temperature.iter() {
                    self.channel.substance.check(temperature, pressure)?;
                }
                return Ok(profile);
            }
        }
        Err(Refused::NotSettled { what: "a step along the channel", change })
    }

    /// Brings the fluid's states up to date with pressure and temperature; what overshoots the table is held at its end
    /// until the rounds settle.
    fn refresh(&self, profile: &mut Profile) -> Result<(), Refused> {
        let pressure = self.scales.pressure_at(profile.loss);
        let position = profile.position / self.channel.length;
        if pressure.is_nan() || pressure <= 0.0 {
            return Err(Refused::Vacuum { pressure, position });
        }
        let substance = &self.channel.substance;
        for (state, temperature) in profile.states.iter_mut().zip(profile.temperature.iter_mut()) {
            *temperature = substance.nearest_temperature(*temperature);
            *state = substance.state(*temperature, pressure, &self.scales.reference);
        }
        Ok(())
    }

    /// Mass flux across s that the change of mass flux along z demands.
    fn crossing(&self, mass: &DVector<f64>) -> DVector<f64> {
        -(&self.grid.integral * (mass * self.past.lead + &self.past.mass))
    }

    /// Conductance between neighbouring shares for a property: `g(s) property/(G ds/dxi)`, 1/m.
    fn conductance(&self, profile: &Profile, pick: impl Fn(&State) -> f64) -> DVector<f64> {
        let section = self.channel.section;
        let spreading = self.grid.share.map(|s| section.spreading(s) / self.scales.flux);
        profile.property(pick).component_mul(&spreading).component_div(&self.grid.slope)
    }

    /// Wall conductances per area, `perimeter/(area G length)`, 1/(Pa s m) : for slip and for the temperature jump.
    fn wall(&self, profile: &Profile) -> [f64; 2] {
        let last = self.grid.len() - 1;
        let pressure = self.scales.pressure_at(profile.loss);
        let least = NO_SLIP * self.channel.section.hydraulic_diameter();
        let per_area = self.channel.section.wall_per_area() / self.scales.flux;
        let lengths =
            self.channel.substance.wall_lengths(profile.temperature[last], pressure, profile.states[last].viscosity);
        lengths.map(|length| per_area / length.max(least))
    }

    /// One Newton step for velocity and pressure; returns the largest relative change.
    fn improve_velocity(&self, profile: &mut Profile) -> Result<f64, Refused> {
        let (grid, lead, n) = (self.grid, self.past.lead, self.grid.len());
        let density = profile.property(|state| state.density / self.scales.density);
        let u = &profile.velocity;
        let mass = density.component_mul(u);
        // Change of density with the loss: proportional to pressure for a gas.
        let unit = self.scales.density * self.scales.speed * self.scales.speed;
        let softness =
            if self.channel.substance.is_gas() { -unit / self.scales.pressure_at(profile.loss) } else { 0.0 };
        let crossing = self.crossing(&mass);
        let viscous = self.conductance(profile, |state| state.viscosity);
        let friction = self.wall(profile)[0] * profile.states[n - 1].viscosity;

        let strain = (&grid.derivative * u).component_mul(&viscous);
        let flux = strain - crossing.component_mul(u);
        let loss_slope = lead * profile.loss + self.past.loss;
        let inertia = (mass.component_mul(u) * lead + &self.past.momentum).add_scalar(-loss_slope);
        let mut residual = &grid.weak * flux + inertia.component_mul(&grid.weight);
        residual[n - 1] += friction * u[n - 1];

        let mut inside = scaled_rows(&grid.derivative, &viscous);
        inside += scaled(&grid.integral, u, &(&density * lead));
        for i in 0..n {
            inside[(i, i)] -= crossing[i];
        }
        let mut jacobian = DMatrix::zeros(n + 1, n + 1);
        jacobian.view_mut((0, 0), (n, n)).copy_from(&(&grid.weak * inside));
        let spill = &grid.weak * (&grid.integral * (&mass * (softness * lead))).component_mul(u);
        for i in 0..n {
            jacobian[(i, i)] += grid.weight[i] * lead * 2.0 * mass[i];
            jacobian[(i, n)] = grid.weight[i] * lead * (softness * mass[i] * u[i] - 1.0) + spill[i];
            jacobian[(n, i)] = grid.weight[i] * density[i];
        }
        jacobian[(n - 1, n - 1)] += friction;
        jacobian[(n, n)] = softness * grid.weight.dot(&mass);
        let right = DVector::from_iterator(n + 1, residual.iter().map(|r| -r).chain([1.0 - grid.weight.dot(&mass)]));
        let step = solve(jacobian, right)?;
        profile.velocity += step.rows(0, n);
        profile.loss += step[n];
        Ok(step.rows(0, n).amax().max(step[n].abs() / (1.0 + profile.loss.abs())))
    }

    /// One step for temperature; returns the largest relative change.
    fn improve_temperature(&self, profile: &mut Profile) -> Result<f64, Refused> {
        let (grid, lead, n) = (self.grid, self.past.lead, self.grid.len());
        let carried = profile.carried(self.scales.density, self.scales.speed);
        let crossing = self.crossing(&carried.mass);
        let total = carried.energy.component_div(&carried.mass);
        let speed = self.scales.speed;
        let viscous = self.conductance(profile, |state| state.viscosity * speed * speed);
        let conducting = self.conductance(profile, |state| state.conductivity);
        let u = &profile.velocity;

        let work = (&grid.derivative * u).component_mul(u).component_mul(&viscous);
        let heat = (&grid.derivative * &profile.temperature).component_mul(&conducting);
        let flux = work + heat - crossing.component_mul(&total);
        let mut residual = &grid.weak * flux + (&carried.energy * lead + &self.past.energy).component_mul(&grid.weight);
        let capacity = profile.property(|state| state.capacity);
        let mut inside = scaled_rows(&grid.derivative, &conducting);
        for i in 0..n {
            inside[(i, i)] -= crossing[i] * capacity[i];
        }
        let mut jacobian = &grid.weak * inside;
        for i in 0..n {
            jacobian[(i, i)] += grid.weight[i] * lead * carried.mass[i] * capacity[i];
        }
        if self.channel.wall == Wall::Isothermal {
            let [slip, jump] = self.wall(profile);
            let (state, wall_speed) = (&profile.states[n - 1], speed * u[n - 1]);
            let excess = profile.temperature[n - 1] - self.channel.wall_temperature;
            residual[n - 1] += slip * state.viscosity * wall_speed * wall_speed + jump * state.conductivity * excess;
            jacobian[(n - 1, n - 1)] += jump * state.conductivity;
        }
        let step = solve(jacobian, -residual)?;
        profile.temperature += &step;
        Ok(step.amax() / self.channel.wall_temperature)
    }
}

/// A matrix with each row multiplied by an entry of `rows`.
fn scaled_rows(matrix: &DMatrix<f64>, rows: &DVector<f64>) -> DMatrix<f64> {
    let mut product = matrix.clone();
    for mut column in product.column_iter_mut() {
        column.component_mul_assign(rows);
    }
    product
}

/// A matrix with rows and columns multiplied by entries of `rows` and `columns`.
fn scaled(matrix: &DMatrix<f64>, rows: &DVector<f64>, columns: &DVector<f64>) -> DMatrix<f64> {
    let mut product = scaled_rows(matrix, rows);
    for (mut column, &factor) in product.column_iter_mut().zip(columns.iter()) {
        column *= factor;
    }
    product
}

fn solve(matrix: DMatrix<f64>, right: DVector<f64>) -> Result<DVector<f64>, Refused> {
    let solution = matrix.lu().solve(&right).filter(|x| x.iter().all(|value| value.is_finite()));
    solution.ok_or(Refused::NotSettled { what: "a step along the channel", change: f64::NAN })
}
