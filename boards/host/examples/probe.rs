//! Probe.
use evenbore::fluid::catalogue::*;
use evenbore_bench::virtual_element::*;
use std::time::Instant;
fn main() {
    let n2 = Substance::new(NITROGEN.fluid());
    let co2 = Substance::new(CARBON_DIOXIDE.fluid());
    let water = Substance::new(WATER.fluid());
    let g1 = VirtualElement::new(Section::RoundTube { bore: 0.5e-3 }, 100, 0.1).unwrap();
    let g3 = VirtualElement::new(Section::RoundTube { bore: 0.2e-3 }, 4, 0.1).unwrap();
    let g4 = VirtualElement::new(Section::RoundTube { bore: 0.8e-3 }, 200, 0.04).unwrap();
    let g5 = VirtualElement::new(Section::ParallelPlates { gap: 0.2e-3, width: 0.4 }, 1, 0.06).unwrap();
    for (name, e, s, p, dp) in [
        ("G1 N2", &g1, &n2, 120e3, 5e3), ("G1 N2 low", &g1, &n2, 120e3, 50.0), ("G3 N2", &g3, &n2, 180e3, 99e3),
        ("G4 CO2", &g4, &co2, 120e3, 1.2e3), ("G5 N2", &g5, &n2, 120e3, 4e3), ("L1 water", &g1, &water, 120e3, 5e3),
    ] {
        let up = Upstream::at(p, 293.15);
        let t0 = Instant::now();
        let out = match e.flow(s, &up, dp) { Ok(o) => o, Err(err) => { println!("{name}: {err}"); continue } };
        let t1 = t0.elapsed();
        let base = e.pressure_drop(s, &up, out.mass_flow).unwrap().pressure_drop;
        let fine = Resolution::FINE;
        let mut line = String::new();
        for r in [
            Resolution { degree: 48, ..fine }, Resolution { degree: 20, ..fine },
            Resolution { growth: fine.growth.sqrt(), longest_step: fine.longest_step / 2.0, ..fine },
            Resolution { first_step: 1e-11, ..fine }, fine.doubled()] {
            let t0 = Instant::now();
            match e.clone().with_resolution(r).unwrap().pressure_drop(s, &up, out.mass_flow) {
                Ok(v) => line += &format!(" {:+.2} ppm ({:.0} ms)", (v.pressure_drop / base - 1.0) * 1e6, t0.elapsed().as_secs_f64() * 1e3),
                Err(err) => line += &format!(" {err}"),
            }
        }
        println!("{name}: {:.6e} kg/s Re {:.0} M {:.3} steps {} {:.0} ms: N64, N24, half steps, first step/100, doubled:{line}", out.mass_flow, out.reynolds, out.mach, out.stations.len(), t1.as_secs_f64() * 1e3);
    }
}
