//! The link's behaviour as IEEE 488.2 and SCPI-99 describe it. Where a row names a standard, it is from memory of it.
#![cfg(feature = "link")]

mod link_instrument;

use evenbore::link::{Command, Interpreter, Line, LinkError, QUEUE_LENGTH, Reply};
use link_instrument::{Instrument, TABLE, Talk};

#[test]
fn every_error_has_its_own_number() {
    let mut numbers: Vec<i16> = LinkError::ALL.iter().map(|e| e.number()).collect();
    numbers.sort_unstable();
    numbers.dedup();
    assert_eq!(numbers.len(), LinkError::ALL.len());
    assert_eq!((LinkError::QueueOverflow.number(), LinkError::QueueOverflow.text()), (-350, "Queue overflow"));
}

#[test]
fn long_and_short_forms_in_any_case_and_nothing_between() {
    for (line, answers) in [
        ("MEASURE:FLOW:VOLUME?", true),
        ("meas:flow:vol?", true),
        ("MeAs:FlOw?", true),
        (":MEAS:FLOW?", true),
        ("\t :MEAS:FLOW? \r", true),
        ("MEASU:FLOW?", false),
        ("MEA:FLOW?", false),
        ("MEASURE:FLOWS?", false),
        ("MEAS:FLOW:VOL:MORE?", false),
        ("MEAS?", false),
        ("FLOW?", false),
        ("MEAS1:FLOW?", false),
        ("MEAS:FLOW", false), // no command of this query
    ] {
        let mut talk = Talk::new();
        let answer = talk.ask(line);
        assert_eq!(answer == "1.500000E-04", answers, "{line}: {answer}");
        assert_eq!(talk.queued(), if answers { vec![] } else { vec![-113] }, "{line}");
    }
}

/// Path rules (SCPI-99 volume 1, 6.2.4): message, answer, errors.
#[test]
fn paths_through_compound_messages() {
    const FLOW: &str = "1.500000E-04";
    let both = format!("{FLOW};2.000000E-05");
    let three = format!("{FLOW};1;2.000000E-05");
    for (line, answer, errors) in [
        ("MEAS:FLOW:VOL?;MASS?", &*both, &[][..]),             // same branch
        ("MEAS:FLOW:VOL?;:MEAS:FLOW:MASS?", &both, &[]),       // from the root
        ("MEAS:FLOW:VOL?;*OPC?;MASS?", &three, &[]),           // a common command leaves the path
        ("MEAS:FLOW?;FLOW:MASS?", &both, &[]),                 // the path is the header as sent
        ("MEAS:FLOW?;MASS?", FLOW, &[-113]),                   // a node left out is not on the path
        ("MEAS:FLOW:VOL?;MEAS:FLOW:MASS?", FLOW, &[-113]),     // no colon: below the path
        ("MEAS:FLOW:VOL?;PRES:DROP?", FLOW, &[-113]),          // one level too deep
        ("MEAS:FLOW?;PRES:DROP?", "1.500000E-04;1234.6", &[]), // goes down from MEAS
        ("DAMP 2;DAMP?", "2.000000E+00", &[]),                 // at the root
        ("SENS:DAMP 2;DAMP?;:DAMP?", "2.000000E+00;2.000000E+00", &[]),
        ("SENS:DAMP:TIME 2;TIME?", "2.000000E+00", &[]),
        ("SENS:AVER:STAT ON;STAT?", "1", &[]),
        ("STAT:OPER:ENAB 5;ENAB?;COND?", "5;0", &[]),
        ("SYST:ERR?;VERS?", "0,\"No error\";1999.0", &[]), // SCPI-99's own kind of example
        ("SYST:ERR:NEXT?;COUN?", "0,\"No error\";0", &[]),
        (":SYST:VERS?;*CLS;ERR:COUN?", "1999.0;0", &[]),
        (";;MEAS:FLOW?;", FLOW, &[]),
        ("*OPC?;:*OPC?", "1", &[-102]),
        ("MEAS::FLOW?", "", &[-102]),
        ("MEAS:FLOW:?", "", &[-102]),
        ("A:B:C:D:E:F:G:H:I?", "", &[-113]),
        ("SENS:DAMP 99;DAMP?", "0.000000E+00", &[-222]), // an execution error does not end the message
        ("NONSENSE;*OPC?", "", &[-113]),                 // a command error does
    ] {
        let mut talk = Talk::new();
        assert_eq!(talk.ask(line), answer, "{line}");
        assert_eq!(talk.queued(), errors, "{line}");
    }
    assert_eq!(Talk::new().ask("MEAS:FLOW:VOL?"), FLOW, "the path does not outlive its message");
}

#[test]
fn optional_nodes_and_numeric_suffixes() {
    let mut talk = Talk::new();
    for line in ["SENSE:DAMPING:TIME?", "SENS:DAMP?", "DAMP:TIME?", "damping?", "SENS1:DAMP?"] {
        assert_eq!(talk.ask(line) == "0.000000E+00", line != "SENS1:DAMP?", "{line}");
    }
    assert_eq!(talk.queued(), [-113]);
    assert_eq!(talk.ask("OUTP:LEV 3;:OUTP2:LEV 4;:OUTPUT1:LEVEL?;:OUTP2:LEV?"), "3;4");
    for line in ["OUTP3:LEV?", "OUTP0:LEV?", "OUTP99999999:LEV 1"] {
        assert_eq!(talk.errors(line), [-114], "{line}");
    }
    assert_eq!(talk.errors("OUTP2X:LEV?"), [-113]);
    assert_eq!(talk.instrument.settings.outputs, [3, 4]);
}

/// Each row: what is sent to a setting, and the errors; on an error the setting stays.
#[test]
fn wrong_parameters_get_the_standards_error_and_change_nothing() {
    for (line, errors) in [
        ("DAMP", &[-109][..]),
        ("DAMP ,", &[-108]),
        ("DAMP 1,2", &[-108]),
        ("DAMP? 1,2", &[-108]),
        ("DAMP? 1", &[-104]),
        ("MEAS:FLOW? 1", &[-108]),
        ("*CLS 1", &[-108]),
        ("*ESE", &[-109]),
        ("*ESE 256", &[-222]),
        ("*ESE 1 V", &[-138]),
        ("*ESE \"1\"", &[-104]),
        ("*RST?", &[-113]),
        ("*STB", &[-113]),
        ("*XYZ", &[-113]),
        ("STAT:OPER 1", &[-113]),
        ("STAT:OPER:ENAB 65536", &[-222]),
        ("DAMP 61", &[-222]),
        ("DAMP 1E99", &[-222]),
        ("DAMP -1", &[-222]),
        ("DAMP 1 KPA", &[-131]),
        ("DAMP 1 KMIN", &[-131]),
        ("DAMP 1 ABCDEFGHIJKLM", &[-134]),
        ("DAMP 1$", &[-121]),
        ("DAMP 1 2", &[-131]),
        ("DAMP .", &[-121]),
        ("DAMP 1E33000", &[-123]),
        ("DAMP NAN", &[-104]),
        ("DAMP \"1\"", &[-104]),
        ("DAMP #1x", &[-161]),
        ("DAMP #111", &[-104]),
        ("DAMP (1)", &[-178]),
        ("DAMP,1", &[-111]),
        ("DAMP\"1\"", &[-111]),
        ("DAMP$ 1", &[-101]),
        ("ABCDEFGHIJKLM 1", &[-112]),
        ("AVER:STAT YES", &[-141]),
        ("AVER:STAT \"ON\"", &[-104]),
        ("AVER:STAT ON S", &[-141]),
        ("FLU XENON", &[-141]),
        ("FLU NITRO", &[-141]),
        ("FLU 1", &[-104]),
        ("FLU ABCDEFGHIJKLM", &[-144]),
        ("OUTP:LEV 11", &[-222]),
        ("OUTP:LEV 1 K", &[-138]),
        ("OUTP:LEV MAX", &[-104]),
        ("SYST:LAB text", &[-104]),
        ("SYST:LAB \"no end", &[-151]),
        ("SYST:LAB \"a\"b\"", &[-151]),
        ("SYST:LAB \"a\"b", &[-151]),
        ("SYST:LAB \"a\tb\"", &[-151]),
        ("SYST:LAB \"seventeen letters\"", &[-223]),
        ("DIAG:CONF", &[-221]),
        ("CAL:ZERO 1", &[-203]),
        ("CAL:ZERO 1,2", &[-108]),
    ] {
        let mut talk = Talk::new();
        let before = talk.instrument.settings.clone();
        assert_eq!(talk.errors(line), errors, "{line}");
        assert_eq!(talk.instrument.settings, before, "{line}");
        assert_eq!(talk.ask("STAT:OPER:ENAB?;*ESE?"), "0;0", "{line}");
        talk.queued();
    }
}

#[test]
fn parameters_with_units_limits_and_words() {
    let mut talk = Talk::new();
    talk.unlock();
    for (line, value) in [
        ("DAMP 2", 2.0),
        ("DAMP +2.5e0", 2.5),
        ("DAMP 250 ms", 0.25),
        ("DAMP 250MS", 0.25),
        ("DAMP 0.5 MIN", 30.0),
        ("DAMP MIN", 0.0),
        ("DAMP maximum", 60.0),
        ("DAMP DEF", 1.0),
        ("DAMP 1500000 US", 1.5),
        ("DAMP #HA", 10.0),
        ("DAMP 1 E1", 10.0),
        ("DAMP 2E0S", 2.0),
        ("DAMP  3  ", 3.0),
    ] {
        assert_eq!(talk.errors(line), [], "{line}");
        assert_eq!(talk.instrument.settings.damping, value, "{line}");
    }
    for (text, pascals) in
        [("1 mbar", 100.0), ("0.5 KPA", 500.0), ("-1E-4MAPA", -100.0), ("2 hPa", 200.0), ("1 inH2O", 249.088_91)]
    {
        assert_eq!(talk.errors(&format!("CAL:ZERO {text}")), [], "{text}");
        assert_eq!(talk.instrument.settings.zero, pascals, "{text}");
    }
    assert_eq!(talk.ask("DAMP? MAX;:DAMP? MINIMUM;:DAMP? DEF"), "6.000000E+01;0.000000E+00;1.000000E+00");
    assert_eq!(talk.ask("AVER:STAT ON;STAT?;STAT 0;STAT?;STAT 2;STAT?;STAT off;STAT?"), "1;0;1;0");
    assert_eq!(talk.ask("FLU helium;FLU?;FLU NITR;FLU?;FLU air;FLU?"), "HEL;NITR;AIR");
    assert_eq!(talk.ask("SYST:LAB 'it''s; \"x\", #15';LAB?"), "\"it's; \"\"x\"\", #15\"");
    assert_eq!(talk.ask("SYST:LAB \"\";LAB?"), "\"\"");
    assert_eq!(talk.queued(), []);
}

#[test]
fn a_block_carries_any_bytes() {
    let mut talk = Talk::new();
    talk.unlock();
    let every: Vec<u8> = (0..=255).chain(*b" \n\r;\"',#\n ").collect();
    let mut message = format!("CAL:REC #3{}", every.len()).into_bytes();
    message.extend(&every);
    message.extend(b" \r\n");
    assert_eq!(talk.send(&message), b"");
    assert_eq!((talk.queued(), &talk.instrument.settings.record), (vec![], &every));
    let answer = talk.send(b"CAL:REC?;ZERO?\n");
    assert_eq!(answer, [&b"#3266"[..], &every, b";0.00000000E+00\n"].concat());
    for (bytes, error) in [
        (&b"CAL:REC #15abc\n"[..], None), // half a block: still waiting, LF included
        (b"x\n", Some(vec![])),           // five bytes are there: "abc\nx"
        (b"CAL:REC #0abc\n", Some(vec![-161])),
        (b"CAL:REC #2x\n", Some(vec![-161])),
        (b"CAL:REC #13abcd\n", Some(vec![-161])),
        (b"CAL:REC #9999999999abc\n", Some(vec![-161])),
        (b"CAL:REC #HFF\n", Some(vec![-104])),
    ] {
        assert_eq!(talk.send(bytes), b"");
        let expected = error.unwrap_or_default();
        assert_eq!(talk.queued(), expected, "{bytes:?}");
    }
    assert_eq!(talk.instrument.settings.record, b"abc\nx");
    // A block beyond the line's memory is swallowed whole, with the commands it seems to hold.
    let mut long = b"CAL:REC #42000".to_vec();
    long.extend(b"\nDAMP 9\n".repeat(250));
    long.push(b'\n');
    assert_eq!(talk.send(&long), b"");
    assert_eq!((talk.queued(), talk.instrument.settings.damping), (vec![-363], 0.0));
}

#[test]
fn lines_too_long_half_or_not_ascii() {
    let mut talk = Talk::new();
    let long = "DAMP 9;".repeat(200);
    assert_eq!(talk.errors(&long), [-363]);
    assert_eq!(talk.instrument.settings.damping, 0.0, "nothing of it was carried out");
    assert_eq!(talk.errors("DAMP 9;DAMP \u{b5}"), [-101]);
    assert_eq!(talk.instrument.settings.damping, 0.0);
    assert_eq!(talk.send(b"\xFF\x00\x80\n"), b"");
    assert_eq!(talk.queued(), [-101]);
    // Half a line for ever; then the end of it.
    for _ in 0..100_000 {
        assert_eq!(talk.send(b"A"), b"");
    }
    assert_eq!(talk.queued(), []);
    assert_eq!(talk.errors(""), [-363]);
    assert_eq!(talk.ask("*OPC?"), "1");
    talk.send(b"DAMP 9");
    talk.port.clear();
    assert_eq!(talk.ask("*OPC?"), "1", "a device clear forgets the half line");
    // Exactly as long as the memory, and one more.
    for (extra, error) in [(0, None), (1, Some(LinkError::InputOverrun))] {
        let mut line = Line::<16>::new();
        assert!((0..16 + extra).all(|_| line.push(b' ').is_none()));
        assert_eq!(line.push(b'\n'), Some(error.map_or(Ok(()), Err)));
    }
    assert_eq!(talk.send(b"\n\r\n \n;\n"), b"");
    assert_eq!(talk.queued(), [], "empty lines are no error");
}

#[test]
fn the_error_queue() {
    let mut talk = Talk::new();
    assert_eq!(talk.ask("SYST:ERR?"), "0,\"No error\"");
    talk.ask("NONSENSE");
    talk.ask("DAMP 99");
    assert_eq!(talk.ask("SYSTem:ERRor:COUNt?"), "2");
    assert_eq!(talk.ask("SYST:ERR?"), "-113,\"Undefined header\"");
    assert_eq!(talk.ask("*RST;:SYST:ERR:COUN?"), "1", "*RST leaves the queue");
    assert_eq!(talk.ask("SYST:ERR:NEXT?;NEXT?"), "-222,\"Data out of range\";0,\"No error\"");
    for _ in 0..QUEUE_LENGTH + 5 {
        talk.ask("NONSENSE");
    }
    talk.ask("*ESR?");
    let mut expected = vec![-113; QUEUE_LENGTH - 1];
    expected.push(-350);
    assert_eq!(talk.queued(), expected);
    for _ in 0..3 * QUEUE_LENGTH {
        talk.ask("NONSENSE");
        assert_eq!(talk.ask("SYST:ERR?"), "-113,\"Undefined header\"");
    }
    talk.ask("NONSENSE");
    assert_eq!(talk.ask("*CLS;:SYST:ERR?"), "0,\"No error\"");
}

#[test]
fn common_commands() {
    let mut talk = Talk::new();
    assert_eq!(talk.ask("*ESR?"), "128", "power on");
    assert_eq!(talk.ask("*ESR?"), "0", "reading clears");
    assert_eq!(talk.ask("*IDN?"), "Tests_ Ltd,LFE,0,1");
    assert_eq!(talk.ask("*OPC?;*TST?"), "1;0");
    assert_eq!(talk.ask("*OPC;*ESR?;*WAI"), "1");
    assert_eq!(talk.ask("DAMP 5;*RST;:DAMP?"), "0.000000E+00");
    assert_eq!(talk.instrument.resets, 1);
    assert_eq!(talk.ask("*ESE 60;*ESE?;*SRE 255;*SRE?"), "60;191");
    assert_eq!(talk.queued(), []);
}

#[test]
fn standard_events_and_the_status_byte() {
    for (line, event) in [("NONSENSE", "32"), ("DAMP 99", "16"), ("DIAG:LONG?", "4"), ("DIAG:SIL?", "8"), ("*OPC", "1")]
    {
        let mut talk = Talk::new();
        talk.ask("*CLS;*ESE 255;*SRE 32");
        talk.ask(line);
        let queue = if line == "*OPC" { 0 } else { 4 };
        assert_eq!(talk.ask("*STB?"), (32 + 64 + queue).to_string(), "{line}");
        assert_eq!(talk.ask("*ESR?;*STB?"), format!("{event};{}", queue + 16), "an answer waits: MAV");
    }
    let mut talk = Talk::new();
    for _ in 0..=QUEUE_LENGTH {
        talk.ask("NONSENSE");
    }
    assert_eq!(talk.ask("*ESR?"), (128 + 32 + 8).to_string(), "an overflow is a device error besides");
}

#[test]
fn operation_and_questionable_registers() {
    for (name, bit) in [("OPER", 128), ("QUES", 8)] {
        let mut talk = Talk::new();
        let condition = |talk: &mut Talk, bits| {
            let status = &mut talk.port.interpreter.session.status;
            let register = if name == "OPER" { &mut status.operation } else { &mut status.questionable };
            register.set_condition(bits);
        };
        assert_eq!(talk.ask(&format!("STAT:{name}:ENAB?;PTR?;NTR?;COND?;EVEN?")), "0;32767;0;0;0");
        condition(&mut talk, 0b1001);
        assert_eq!(talk.ask("*STB?"), "0");
        assert_eq!(
            talk.ask(&format!("STAT:{name}:ENAB #B1000;*STB?;*SRE 255;*STB?")),
            format!("{bit};{}", bit + 64 + 16)
        );
        condition(&mut talk, 0);
        assert_eq!(talk.ask(&format!("STAT:{name}:COND?;EVEN?")), "0;9", "events outlive conditions");
        assert_eq!(talk.ask(&format!("STAT:{name}?;*STB?")), "0;80");
        assert_eq!(talk.errors(&format!("STAT:{name}:PTR 0;NTR 1")), []);
        condition(&mut talk, 0xFFFF);
        assert_eq!(talk.ask(&format!("STAT:{name}:COND?;EVEN?")), "32767;0");
        condition(&mut talk, 0);
        assert_eq!(talk.ask(&format!("STAT:{name}:EVEN?")), "1", "a fall");
        condition(&mut talk, 1);
        condition(&mut talk, 0);
        assert_eq!(talk.ask(&format!("*RST;:STAT:{name}:ENAB?")), "8", "*RST leaves enables");
        assert_eq!(talk.ask(&format!("STAT:PRES;:STAT:{name}:ENAB?;PTR?;NTR?;EVEN?")), "0;32767;0;1");
        condition(&mut talk, 4);
        assert_eq!(talk.ask(&format!("*CLS;:STAT:{name}:EVEN?;COND?")), "0;4");
        assert_eq!(talk.ask(&format!("STAT:{name}:ENAB 65535;ENAB?")), "32767", "the sixteenth bit is zero");
    }
}

#[test]
fn answers_that_fail() {
    let mut talk = Talk::new();
    assert_eq!(talk.ask("MEAS:FLOW?;:DIAG:LONG?;:MEAS:FLOW?"), "", "the whole answer is dropped");
    assert_eq!(talk.queued(), [-430]);
    assert_eq!(talk.ask("MEAS:FLOW?;:DIAG:HALF?;*OPC?"), "1.500000E-04;1", "half an answer is taken back");
    assert_eq!(talk.queued(), [-240]);
    assert_eq!(talk.ask("*IDN?;*OPC?"), "Tests_ Ltd,LFE,0,1");
    assert_eq!(talk.queued(), [-440]);
    assert_eq!(talk.ask("*OPC?;*IDN?"), "1;Tests_ Ltd,LFE,0,1");
    assert_eq!(talk.queued(), []);
    // An answer that just fits, and one that does not.
    for (room, fits) in [(2, true), (1, false)] {
        let mut buffer = heapless::Vec::<u8, 2>::new();
        let mut small = heapless::Vec::<u8, 1>::new();
        let out = if room == 2 { buffer.as_mut_view() } else { small.as_mut_view() };
        let mut interpreter = Interpreter::new(TABLE, 0);
        interpreter.run(b"*OPC?\n", &mut Instrument::new(), Reply::new(out));
        assert_eq!(interpreter.session.errors.is_empty(), fits);
    }
}

#[test]
fn the_lock() {
    let mut talk = Talk::new();
    assert_eq!(talk.ask("CAL:ZERO?"), "0.00000000E+00", "reading needs no code");
    assert_eq!(talk.errors("CAL:ZERO 5"), [-203]);
    assert_eq!(talk.errors("CAL:SEC:STAT OFF"), [-109]);
    assert_eq!(talk.errors("CAL:SEC:STAT OFF,\"wrong\""), [-224]);
    assert_eq!(talk.errors("CAL:SEC:STAT OFF,\"2718\""), [-203], "within the wait");
    assert_eq!((talk.instrument.lock.failures(), talk.instrument.events), (1, 0));
    talk.instrument.now_ms = 1000;
    talk.unlock();
    assert_eq!(talk.errors("CAL:ZERO 5"), []);
    assert_eq!(talk.errors("CAL:ZERO 5000"), [-222]);
    assert_eq!(talk.instrument.events, 1, "only what was written counts");
    let mut other = Interpreter::new(TABLE, 1);
    let mut out = heapless::Vec::<u8, 64>::new();
    other.run(b"CAL:ZERO 6;SEC:STAT OFF,'2718'", &mut talk.instrument, Reply::new(out.as_mut_view()));
    assert_eq!(other.session.errors.len(), 2, "another port neither writes nor takes the lock over");
    assert_eq!(talk.instrument.settings.zero, 5.0);
    talk.instrument.now_ms += 60_000;
    assert_eq!(talk.errors("CAL:ZERO 7"), [-203], "shut by itself");
    talk.unlock();
    assert_eq!(talk.errors("CAL:SEC:STAT ON;:CAL:ZERO 7"), [-203]);
    let mut wait = 1000;
    for failures in 1..14 {
        assert_eq!(talk.errors("CAL:SEC:STAT OFF,'x'"), [-224]);
        talk.instrument.now_ms += wait - 1;
        assert_eq!(talk.errors("CAL:SEC:STAT OFF,'2718'"), [-203], "{failures} failures");
        talk.instrument.now_ms += 1;
        wait = (wait * 2).min(1_024_000);
    }
}

#[test]
fn a_table_can_be_constant_and_patterns_are_shown() {
    const ROW: Command<Instrument> = Command::new("A[:B]").protected();
    assert_eq!((ROW.pattern(), format!("{ROW:?}")), ("A[:B]", "A[:B]".to_owned()));
}
