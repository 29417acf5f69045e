//! An instrument for the tests of the link: settings, a protected one, a record as bytes, an answer too long.
#![allow(dead_code)] // every test file uses its own part

use evenbore::link::{Arguments, Command, Device, Identification, LinkError, Lock, Numeric, Port, Reply, unit};

pub const CODE: &str = "2718";

#[derive(Debug, Clone, PartialEq, Default)]
pub struct Settings {
    pub damping: f32,
    pub zero: f32,
    pub averaging: bool,
    pub fluid: usize,
    pub outputs: [i32; 2],
    pub record: Vec<u8>,
    pub label: String,
}

pub struct Instrument {
    pub settings: Settings,
    pub lock: Lock,
    pub now_ms: u64,
    pub events: u32,
    pub resets: u32,
}

impl Instrument {
    pub fn new() -> Self {
        let lock = Lock::new(CODE, 60_000).unwrap();
        Self { settings: Settings::default(), lock, now_ms: 0, events: 0, resets: 0 }
    }
}

impl Device for Instrument {
    fn identification(&self) -> Identification<'_> {
        Identification { manufacturer: "Tests, Ltd", model: "LFE", serial: "", version: "1" }
    }
    fn reset(&mut self) {
        self.resets += 1;
        self.settings.damping = 0.0;
    }
    fn may_write(&self, port: u8) -> bool {
        self.lock.is_open(port, self.now_ms)
    }
    fn written(&mut self, _command: &'static str, _port: u8) {
        self.events += 1;
    }
}

const DAMPING: Numeric = Numeric { units: unit::TIME, least: 0.0, most: 60.0, default: 1.0 };
const ZERO: Numeric = Numeric { units: unit::PRESSURE, least: -1e3, most: 1e3, default: 0.0 };
const FLUIDS: [&str; 3] = ["NITRogen", "AIR", "HELium"];

type Done = Result<(), LinkError>;

fn set_damping(i: &mut Instrument, a: &mut Arguments<'_>) -> Done {
    i.settings.damping = a.number(&DAMPING)?;
    Ok(())
}
fn damping(i: &mut Instrument, a: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.number(a.limit(&DAMPING)?.unwrap_or(i.settings.damping));
    Ok(())
}
fn set_zero(i: &mut Instrument, a: &mut Arguments<'_>) -> Done {
    i.settings.zero = a.number(&ZERO)?;
    Ok(())
}
fn zero(i: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.exact(i.settings.zero);
    Ok(())
}
fn set_averaging(i: &mut Instrument, a: &mut Arguments<'_>) -> Done {
    i.settings.averaging = a.boolean()?;
    Ok(())
}
fn averaging(i: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.boolean(i.settings.averaging);
    Ok(())
}
fn set_fluid(i: &mut Instrument, a: &mut Arguments<'_>) -> Done {
    i.settings.fluid = a.choice(&FLUIDS)?;
    Ok(())
}
fn fluid(i: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.word(["NITR", "AIR", "HEL"][i.settings.fluid]);
    Ok(())
}
fn set_output(i: &mut Instrument, a: &mut Arguments<'_>) -> Done {
    let place = usize::from(a.suffix(0, 1..=2)?) - 1;
    i.settings.outputs[place] = a.integer(-10..=10)?;
    Ok(())
}
fn output(i: &mut Instrument, a: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.integer(i.settings.outputs[usize::from(a.suffix(0, 1..=2)?) - 1]);
    Ok(())
}
fn set_record(i: &mut Instrument, a: &mut Arguments<'_>) -> Done {
    i.settings.record = a.block()?.to_vec();
    Ok(())
}
fn record(i: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.block(&i.settings.record);
    Ok(())
}
fn set_label(i: &mut Instrument, a: &mut Arguments<'_>) -> Done {
    i.settings.label = a.string::<16>()?.as_str().to_owned();
    Ok(())
}
fn label(i: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.string(&i.settings.label);
    Ok(())
}
fn secure(i: &mut Instrument, a: &mut Arguments<'_>) -> Done {
    let port = a.port();
    if a.boolean()? {
        i.lock.shut();
        return Ok(());
    }
    i.lock.open(&a.string::<16>()?, port, i.now_ms)
}
fn flow(_: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.number(1.5e-4);
    Ok(())
}
fn mass(_: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.number(2e-5);
    Ok(())
}
fn pressure(_: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.fixed(1234.567, 1);
    Ok(())
}
fn long(_: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    for _ in 0..400 {
        r.integer(1_000_000);
    }
    Ok(())
}
fn half(_: &mut Instrument, _: &mut Arguments<'_>, r: &mut Reply<'_>) -> Done {
    r.integer(1);
    Err(LinkError::HardwareError)
}
fn silent(_: &mut Instrument, _: &mut Arguments<'_>, _: &mut Reply<'_>) -> Done {
    Ok(())
}
fn conflict(_: &mut Instrument, _: &mut Arguments<'_>) -> Done {
    Err(LinkError::SettingsConflict)
}

pub const TABLE: &[Command<Instrument>] = &[
    Command::new("MEASure:FLOW[:VOLume]").query(0, flow),
    Command::new("MEASure:FLOW:MASS").query(0, mass),
    Command::new("MEASure:PRESsure:DROP").query(0, pressure),
    Command::new("[SENSe:]DAMPing[:TIME]").set(1, set_damping).query(1, damping),
    Command::new("[SENSe:]AVERage:STATe").set(1, set_averaging).query(0, averaging),
    Command::new("[SENSe:]FLUid").set(1, set_fluid).query(0, fluid),
    Command::new("OUTPut#:LEVel").set(1, set_output).query(0, output),
    Command::new("CALibration:SECure:STATe").set(2, secure),
    Command::new("CALibration:ZERO").set(1, set_zero).query(0, zero).protected(),
    Command::new("CALibration:RECord").set(1, set_record).query(0, record).protected(),
    Command::new("SYSTem:LABel").set(1, set_label).query(0, label),
    Command::new("DIAGnostic:LONG").query(0, long),
    Command::new("DIAGnostic:HALF").query(0, half),
    Command::new("DIAGnostic:SILent").query(0, silent),
    Command::new("DIAGnostic:CONFlict").set(0, conflict),
];

/// A port, its instrument, and a way to talk to both.
pub struct Talk {
    pub port: Port<'static, Instrument, 1200, 1200>,
    pub instrument: Instrument,
}

impl Talk {
    pub fn new() -> Self {
        Self { port: Port::new(TABLE, 0), instrument: Instrument::new() }
    }
    /// Sends bytes as they are.
    pub fn send(&mut self, bytes: &[u8]) -> Vec<u8> {
        bytes.iter().flat_map(|&byte| self.port.receive(byte, &mut self.instrument).to_vec()).collect()
    }
    /// Sends a line and returns its answer without LF.
    pub fn ask(&mut self, line: &str) -> String {
        let answer = String::from_utf8(self.send(format!("{line}\n").as_bytes())).unwrap();
        answer.strip_suffix('\n').unwrap_or(&answer).to_owned()
    }
    /// Sends a line that answers nothing and returns the numbers of the errors it queued.
    pub fn errors(&mut self, line: &str) -> Vec<i16> {
        assert_eq!(self.ask(line), "", "{line}");
        self.queued()
    }
    /// Empties the error queue.
    pub fn queued(&mut self) -> Vec<i16> {
        std::iter::from_fn(|| self.port.interpreter.session.errors.pop()).map(|e| e.number()).collect()
    }
    pub fn unlock(&mut self) {
        assert_eq!(self.errors(&format!("CAL:SEC:STAT OFF,\"{CODE}\"")), []);
    }
}
