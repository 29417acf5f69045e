//! What the library costs on a machine, the table that says so and the budget that holds it.

use super::image::{Sizes, sizes};
use super::machine::Machine;
use std::collections::BTreeMap;

/// How far a limit may lie above what is counted before it has to be tightened.
const SLACK: f64 = 1.25;

/// What one piece of work costs.
struct Work {
    mean: u32,
    worst: u32,
    stack: u32,
}

/// What the library costs on one machine.
pub struct Costs {
    work: BTreeMap<String, Work>,
    core: Sizes,
    record: Sizes,
}

impl Costs {
    /// Counts on a machine.
    pub fn of(machine: &Machine) -> Self {
        let printed = machine.run("cost");
        let work = printed.lines().map(|line| match line.split(' ').collect::<Vec<_>>()[..] {
            [name, mean, worst, stack] => {
                let [mean, worst, stack] = [mean, worst, stack].map(|n| n.parse().unwrap());
                (name.to_owned(), Work { mean, worst, stack })
            }
            _ => panic!("{}: cost printed {line}", machine.name),
        });
        let empty = sizes(&machine.image("size_empty"));
        let over = |program| {
            let whole = sizes(&machine.image(program));
            Sizes { flash: whole.flash - empty.flash, ram: whole.ram - empty.ram }
        };
        Self { work: work.collect(), core: over("size_core"), record: over("size_record") }
    }

    fn worst(&self, work: &str) -> u32 {
        self.work[work].worst
    }

    /// What the budget limits, in the order of its file.
    fn limited(&self) -> [(&'static str, u32); 11] {
        [
            ("curve-sample", self.worst("curve-sample")),
            ("curve", self.worst("curve")),
            ("sample", self.worst("sample")),
            ("full", self.worst("full")),
            ("flow", self.worst("flow")),
            ("decode", self.worst("decode")),
            (
                "stack",
                ["curve-sample", "sample", "full", "flow"].map(|work| self.work[work].stack).into_iter().max().unwrap(),
            ),
            ("decode-stack", self.work["decode"].stack),
            ("flash", self.core.flash),
            ("record-flash", self.record.flash),
            ("ram", self.core.ram.max(self.record.ram)),
        ]
    }
}

/// What is wrong with a budget, a line each: a limit exceeded, far too wide, missing, or of nothing.
pub fn complaints(found: &[(Machine, Costs)], budget: &str) -> Vec<String> {
    let mut limits = BTreeMap::new();
    for line in budget.lines().filter(|line| !line.starts_with('#') && !line.is_empty()) {
        let (name, limit) = line.rsplit_once(' ').unwrap_or_else(|| panic!("no limit: {line}"));
        let limit: u32 = limit.parse().unwrap_or_else(|_| panic!("not a number: {line}"));
        assert!(limits.insert(name.to_owned(), limit).is_none(), "twice: {line}");
    }
    let mut complaints = Vec::new();
    for (machine, costs) in found {
        for (quantity, value) in costs.limited() {
            let name = format!("{} {quantity}", machine.name);
            match limits.remove(&name) {
                None => complaints.push(format!("{name} {value} is missing")),
                Some(limit) if value > limit => complaints.push(format!("{name} {limit} is exceeded: {value}")),
                Some(limit) if f64::from(limit) > SLACK * f64::from(value) && limit > 0 => {
                    complaints.push(format!("{name} {limit} is too wide: {value}"));
                }
                Some(_) => {}
            }
        }
    }
    complaints.extend(limits.into_keys().map(|name| format!("{name} is no machine's quantity")));
    complaints
}

/// The table of costs.
pub fn table(found: &[(Machine, Costs)]) -> String {
    let names: Vec<&str> = found.iter().map(|(machine, _)| machine.name.as_str()).collect();
    let mut text = format!("{HEAD}| | {} |\n{}|\n", names.join(" | "), "|---".repeat(names.len() + 1));
    let mut row = |name: &str, cell: &dyn Fn(&Costs) -> String| {
        let cells: Vec<String> = found.iter().map(|(_, costs)| cell(costs)).collect();
        text += &format!("| {name} | {} |\n", cells.join(" | "));
    };
    for (name, work) in WORK {
        row(name, &|c| format!("{} ({})", c.work[work].mean, c.work[work].worst));
    }
    row("flash, B: walk and one fluid", &|c| c.core.flash.to_string());
    row("flash, B: record and walk", &|c| c.record.flash.to_string());
    row("static RAM, B", &|c| c.core.ram.max(c.record.ram).to_string());
    for (name, work) in WORK {
        row(&format!("stack, B: {name}"), &|c| c.work[work].stack.to_string());
    }
    text + NOTES
}

/// What the README quotes of a table of costs: three machines, the mean of each quantity.
pub fn summary(table: &str) -> String {
    const MACHINES: [(&str, &str); 3] = [("mps2-an386", "M4F"), ("mps2-an385", "M3"), ("microbit", "M0")];
    const ROWS: [(&str, &str); 9] = [
        ("simple model by hand (`powf`, no checks)", "simple model by hand, `powf`"),
        ("sample by a prepared curve", "a pressure drop by a prepared curve"),
        ("sample at prepared conditions", "a pressure drop at prepared conditions"),
        ("conditions and sample", "new conditions, then a pressure drop"),
        ("whole walk with uncertainty", "all of it, with uncertainty"),
        ("a curve prepared", "a curve prepared"),
        ("flash, B: walk and one fluid", "flash, bytes: all of it, one fluid"),
        ("flash, B: record and walk", "flash, bytes: and a record decoded"),
        ("stack, B: whole walk with uncertainty", "stack, bytes: all of it"),
    ];
    let cells = |row: &str| -> Vec<String> {
        let start = format!("| {row} |");
        let line = table.lines().find(|line| line.starts_with(&start)).unwrap_or_else(|| panic!("no row {row}"));
        line[start.len()..].split('|').map(|cell| cell.split(" (").next().unwrap_or("").trim().to_owned()).collect()
    };
    let head = table.lines().find(|line| line.starts_with("| |")).expect("a head");
    let names: Vec<&str> = head.split('|').skip(2).map(str::trim).collect();
    let place = |machine: &str| names.iter().position(|name| *name == machine).expect("a machine of the table");
    let mut text = format!("| instructions | {} |\n|---|---|---|---|\n", MACHINES.map(|(_, name)| name).join(" | "));
    for (row, words) in ROWS {
        let cells = cells(row);
        text += &format!("| {words} | {} |\n", MACHINES.map(|(machine, _)| cells[place(machine)].clone()).join(" | "));
    }
    text
}

const HEAD: &str = "\
# What evenbore costs

Counted on emulated machines; written by `EVENBORE_BLESS=1 cargo test --test boards`, held by `budget.txt`.
Instructions are the mean (and the largest) of 100 readings of nitrogen, call and return included; an emulator counts
instructions, not cycles. Flash is `.text` and `.rodata` over an image that does nothing, optimised for speed.

";

/// What was learned on the way to the table.
const NOTES: &str = "
## Why not less

- New conditions interpolate seven stored curves. In single precision a curve costs 15 instructions on the M4F, 420 on
  the M3 and 720 on the M0; with integers inside about 80, 60 and 130. One arithmetic serves all, so the M4F pays 510
  instructions (659 before) for the 4500 and 5900 that the M3 and the M0 save.
- What remains on the M0 is soft-float: an addition costs about 100 instructions, a product 110, a quotient 140, and a
  pressure drop needs two Newton steps on the whole law, one root and six quotients. `FlowCurve` does without.
- Flash holds both arithmetics, since the record chooses between them when it is read: preparing a curve takes 3 kB of
  it, its 64-bit division 0.9 kB, the checks of element, fluid and calibration 2 kB, the fluid's table 0.8 kB. Optimised
  for size: walk and one fluid 14.9 kB on the M4F, 18.1 kB on the M3, 18.7 kB on the M0.
- Tried, gave nothing: the seed of `micromath` for the thermal speed (libm's root costs 47 instructions on the M3, the
  seed and two Newton steps 430).
";

/// Rows of the table and the names `cost` prints.
const WORK: [(&str, &str); 7] = [
    ("simple model by hand (`powf`, no checks)", "baseline"),
    ("sample by a prepared curve", "curve-sample"),
    ("sample at prepared conditions", "sample"),
    ("conditions and sample", "full"),
    ("whole walk with uncertainty", "flow"),
    ("a curve prepared", "curve"),
    ("record decoded and checked", "decode"),
];
