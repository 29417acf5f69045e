//! Random lines: no panic, no setting changed while the lock is shut, every answer a line of printable ASCII.
#![cfg(feature = "link")]

mod link_instrument;

use evenbore::link::QUEUE_LENGTH;
use link_instrument::{CODE, TABLE, Talk};

struct Random(u64);

impl Random {
    fn next(&mut self) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0 >> 8
    }
    fn below(&mut self, n: usize) -> usize {
        (self.next() % n as u64) as usize
    }
    fn of<'a, T: ?Sized>(&mut self, items: &[&'a T]) -> &'a T {
        items[self.below(items.len())]
    }
}

/// Pieces of messages, so that random lines come deep into the code.
const PIECES: &[&str] = &[
    "CAL:ZERO ",
    "CALibration:RECord ",
    "CAL:SEC:STAT OFF,",
    "DAMP ",
    "SENS:",
    "OUTP2:LEV ",
    "FLU ",
    "MEAS:FLOW?",
    "*IDN?",
    "*ESE ",
    "*CLS",
    "*RST",
    "SYST:ERR?",
    "STAT:OPER:ENAB ",
    "SYST:LAB ",
    ":",
    ";",
    ",",
    "?",
    " ",
    "\"",
    "'",
    "#",
    "#13abc",
    "#3100",
    "#9999999999",
    "1",
    "-1.5E3",
    "KPA",
    "S",
    "MAX",
    "ON",
    "E",
    "(",
    ")",
    "[",
    "]",
    "#HFF",
    "\"text\"",
    "\t",
    "\r",
    "DIAG:LONG?",
    "0.",
    "99999999999999999999",
];

/// Whole units, right and wrong.
const UNITS: &[&str] = &[
    "MEAS:FLOW:VOL?",
    "MASS?",
    ":MEAS:PRES:DROP?",
    "*OPC?",
    "*STB?",
    "*ESR?",
    "*IDN?",
    "*RST",
    ":SENS:DAMP 2 S",
    "DAMP? MAX",
    "CAL:ZERO 3 PA",
    ":CAL:ZERO 1E2",
    "CAL:ZERO?",
    "CAL:REC #13abc",
    ":CAL:SEC:STAT OFF,'1'",
    "CAL:SEC:STAT ON",
    ":SYST:ERR?",
    ":STAT:QUES:ENAB 255",
    "ENAB?",
    ":SYST:LAB 'a;b'",
    "LAB?",
    ":OUTP2:LEV -7",
    ":FLU HEL",
    "FLU?",
    ":AVER:STAT ON",
];

fn line(random: &mut Random) -> Vec<u8> {
    let mut line = Vec::new();
    for _ in 0..random.below(12) {
        match random.below(8) {
            0 => line.push(random.next() as u8),
            _ => line.extend(random.of(PIECES).bytes()),
        }
    }
    if random.below(3) == 0 {
        line = (0..=random.below(5)).flat_map(|_| [random.of(UNITS).as_bytes(), b";"].concat()).collect();
        let (from, to) = (random.below(line.len()), random.next() as u8);
        if random.below(3) == 0 {
            line[from] = to;
        }
    }
    if random.below(6) == 0 {
        line = (0..random.below(80)).map(|_| random.next() as u8).collect();
    }
    if random.below(500) == 0 {
        line.resize(random.below(5000), random.next() as u8);
    }
    line.push(b'\n');
    line
}

#[test]
fn random_lines_do_no_harm() {
    let lines: usize = std::env::var("EVENBORE_LINES").ok().and_then(|n| n.parse().ok()).unwrap_or(1_000_000);
    let (mut random, mut talk) = (Random(0x2545_F491_4F6C_DD1D), Talk::new());
    let (mut answers, mut errors) = (0, 0);
    for _ in 0..lines {
        let line = line(&mut random);
        if line.windows(CODE.len()).any(|part| part == CODE.as_bytes()) {
            continue;
        }
        let answer = talk.send(&line);
        answers += usize::from(!answer.is_empty());
        assert!(answer.iter().all(|b| (b' '..=b'~').contains(b) || *b == b'\n'), "{line:?}: {answer:?}");
        assert!(talk.port.interpreter.session.errors.len() <= QUEUE_LENGTH);
        let settings = &talk.instrument.settings;
        assert!(settings.zero == 0.0 && settings.record.is_empty(), "{line:?}");
        assert!((0.0..=60.0).contains(&settings.damping) && settings.outputs.iter().all(|o| o.abs() <= 10), "{line:?}");
        errors += talk.queued().len();
    }
    assert_eq!(talk.instrument.events, 0);
    assert!(answers > lines / 10 && errors > lines / 3, "{answers} answers, {errors} errors: the lines reach little");
    // Whatever came before, at most a long block and a line's end away from working.
    talk.port.clear();
    assert_eq!(talk.ask("*CLS;*OPC?"), "1");
}

#[test]
fn random_bytes_to_the_interpreter_alone_do_no_harm() {
    use evenbore::link::{Interpreter, Reply};
    let (mut random, mut talk) = (Random(88_172_645_463_325_252), Talk::new());
    let mut interpreter = Interpreter::new(TABLE, 0);
    for _ in 0..200_000 {
        let mut message = line(&mut random);
        message.truncate(random.below(message.len() + 1));
        let mut out = heapless::Vec::<u8, 100>::new();
        interpreter.run(&message, &mut talk.instrument, Reply::new(out.as_mut_view()));
        assert!(talk.instrument.settings.zero == 0.0 && talk.instrument.settings.record.is_empty(), "{message:?}");
    }
    assert_eq!(talk.instrument.events, 0);
}
