//! Readings as they are typed in the van: what is taken, and why the rest is refused.

use proptest::prelude::*;

use super::*;

fn insulation() -> Asked {
    Asked::new("insulation", "MΩ", false, Some(1e9))
}

fn volts() -> Asked {
    Asked::new("volts", "V", false, Some(1000.0))
}

fn leak() -> Asked {
    Asked::new("amps", "mA", false, Some(60.0))
}

fn value(text: &str, ask: &Asked) -> ParsedValue {
    parse(text, ask)
        .unwrap_or_else(|e| panic!("{text}: {e}"))
        .value
}

fn close(text: &str, ask: &Asked, si: f64) {
    match value(text, ask) {
        ParsedValue::Value { value } => {
            assert!((value - si).abs() <= 1e-12 * si.abs(), "{text}: {value}")
        }
        other => panic!("{text}: {other:?}"),
    }
}

fn refused(text: &str, ask: &Asked, code: &str, cure: &str) {
    let error = parse(text, ask).unwrap_err();
    assert_eq!(error.code(), code, "{text}: {error}");
    assert!(error.hint.contains(cure), "{text}: {}", error.hint);
}

#[test]
fn units_and_prefixes() {
    for text in [
        "0.35 MΩ",
        "0.35MΩ",
        "350k",
        "350 kohm",
        "350 KΩ",
        "350000 R",
        "0.35",
        ".35 Mohm",
        "3.5e5 ohms",
        "+0.35 M",
    ] {
        close(text, &insulation(), 350e3);
    }
    close("350 k\u{2126}", &insulation(), 350e3);
    close("350 k\u{3a9}", &insulation(), 350e3);
    close("1800 \u{b5}A", &leak(), 1.8e-3);
    close("1800 \u{3bc}A", &leak(), 1.8e-3);
    close("2 mΩ", &insulation(), 2e-3);
    close("2 M", &insulation(), 2e6);
    close("1.8 mA", &leak(), 1.8e-3);
    close("1.8", &leak(), 1.8e-3);
    close("1.8m", &leak(), 1.8e-3);
    close("1800 µA", &leak(), 1.8e-3);
    close("1800 uA", &leak(), 1.8e-3);
    close("0.5 amps", &leak(), 0.5);
    close("24", &Asked::new("trip-time", "ms", false, None), 0.024);
    close("24 ms", &Asked::new("trip-time", "ms", false, None), 0.024);
    close("0.3 s", &Asked::new("trip-time", "ms", false, None), 0.3);
    close("22", &Asked::new("ramp", "mA", false, None), 0.022);
    close("230V", &volts(), 230.0);
    close("230 volts", &volts(), 230.0);
    close("5.", &volts(), 5.0);
    close("-0", &volts(), 0.0);
}

#[test]
fn limits_ranges_and_rough_values() {
    assert_eq!(
        value(">200 MΩ", &insulation()),
        ParsedValue::Over { over: 200e6 }
    );
    assert_eq!(
        value("> 200", &insulation()),
        ParsedValue::Over { over: 200e6 }
    );
    assert_eq!(value("OL", &insulation()), ParsedValue::Over { over: 1e9 });
    assert_eq!(value("o.l", &insulation()), ParsedValue::Over { over: 1e9 });
    assert_eq!(value("<0.5", &volts()), ParsedValue::Under { under: 0.5 });
    assert_eq!(
        value("40..60 V", &volts()),
        ParsedValue::Range {
            low: 40.0,
            high: 60.0
        }
    );
    assert_eq!(
        value("40 .. 60", &volts()),
        ParsedValue::Range {
            low: 40.0,
            high: 60.0
        }
    );
    assert_eq!(
        value("2..4 mA", &Asked::new("amps", "A", false, None)),
        ParsedValue::Range {
            low: 2e-3,
            high: 4e-3
        }
    );
    assert_eq!(
        value("900mV..1.2V", &volts()),
        ParsedValue::Range {
            low: 0.9,
            high: 1.2
        }
    );
    let rough = parse("~230 V", &volts()).unwrap();
    assert!(rough.rough);
    assert_eq!(rough.value, ParsedValue::Value { value: 230.0 });
}

#[test]
fn words() {
    let is = |text: &str, ask: &Asked, word: Word| {
        assert_eq!(value(text, ask), ParsedValue::Word { word }, "{text}")
    };
    let holds = Asked::new("holds", "", false, None);
    is("yes", &holds, Word::Holds);
    is("no", &holds, Word::Trips);
    is("Holds", &holds, Word::Holds);
    is("trips", &holds, Word::Trips);
    is(
        "no trip",
        &Asked::new("trip-time", "ms", false, None),
        Word::NoTrip,
    );
    is(
        "No  Trip",
        &Asked::new("ramp", "mA", false, None),
        Word::NoTrip,
    );
    is("trips", &Asked::new("loop", "Ω", false, None), Word::Trips);
    is("trips", &Asked::new("volts", "V", true, None), Word::Trips);
    is("yes", &Asked::new("seen", "", false, None), Word::Yes);
    is("dims", &Asked::new("lamp", "", false, None), Word::Dims);
    is("unknown", &volts(), Word::Unknown);
    refused("trips", &volts(), "bad-reading", "47 V");
    refused("dims", &holds, "bad-reading", "`holds`");
    refused("12", &holds, "bad-reading", "`trips`");
    refused("OL", &holds, "bad-reading", "`trips`");
    refused("~yes", &holds, "bad-reading", "~");
}

#[test]
fn refusals() {
    refused("", &volts(), "bad-reading", "47 V");
    refused("   ", &volts(), "bad-reading", "47 V");
    refused("about forty", &volts(), "bad-reading", "bare number is V");
    refused("5 A", &volts(), "wrong-unit", "47 V");
    refused("5 kΩ", &volts(), "wrong-unit", "47 V");
    refused("47 V", &insulation(), "wrong-unit", "MΩ");
    refused("5 kg", &volts(), "wrong-unit", "47 V");
    refused("1e9 V", &volts(), "bad-reading", "milli");
    refused("1e999", &volts(), "bad-reading", "prefix");
    refused("99999999999 MΩ", &insulation(), "bad-reading", "prefix");
    refused("-5", &volts(), "bad-reading", "without the sign");
    refused("−5 V", &volts(), "bad-reading", "without the sign");
    refused("-5..5", &volts(), "bad-reading", "without the sign");
    refused("NaN", &volts(), "bad-reading", "unknown");
    refused("nan V", &volts(), "bad-reading", "unknown");
    refused("inf", &insulation(), "bad-reading", "OL");
    refused("-infinity", &volts(), "bad-reading", "OL");
    refused("0.35 0.40", &insulation(), "bad-reading", "one value");
    refused("12 V 13 V", &volts(), "bad-reading", "one value");
    refused("40-60", &volts(), "bad-reading", "40..60");
    refused("4k7", &insulation(), "bad-reading", "one value");
    refused("0,35", &insulation(), "bad-reading", "0.35");
    refused("0,35 MΩ", &insulation(), "bad-reading", "0.35");
    refused("40..", &volts(), "bad-reading", "40..60 V");
    refused("60..40", &volts(), "bad-reading", "lower");
    refused("1..2..3", &volts(), "bad-reading", "40..60 V");
    refused("5 !", &volts(), "bad-reading", "47 V");
    refused(
        "OL",
        &Asked::new("loop", "Ω", false, None),
        "bad-reading",
        ">200 Ω",
    );
    refused(&"9".repeat(5000), &volts(), "bad-reading", "47 V");
}

#[test]
fn a_reading_is_told_as_it_was_taken() {
    let told = |text: &str, ask: &Asked| format_parsed(&parse(text, ask).unwrap());
    assert_eq!(told("350k", &insulation()), "0.35 MΩ");
    assert_eq!(told("40..60", &volts()), "40 V to 60 V");
    assert_eq!(told("~230", &volts()), "about 230 V");
    assert_eq!(told(">200", &insulation()), "above 200 MΩ");
}

fn asks() -> impl Strategy<Value = Asked> {
    let quantities = [
        "volts",
        "amps",
        "insulation",
        "continuity",
        "loop",
        "trip-time",
        "ramp",
        "holds",
        "lamp",
        "seen",
    ];
    let units = ["V", "A", "mA", "MΩ", "Ω", "ms", "s", ""];
    (0..quantities.len(), 0..units.len(), any::<bool>())
        .prop_map(move |(q, u, low_z)| Asked::new(quantities[q], units[u], low_z, Some(1000.0)))
}

proptest! {
    #[test]
    fn any_text_is_answered(text in "\\PC{0,40}", ask in asks()) {
        drop(parse(&text, &ask));
    }

    #[test]
    fn near_readings_are_answered(text in "[~<>]?[-+0-9.,eE]{0,8}(\\.\\.)?[0-9]{0,3} ?[mkMµΩVAs]{0,3}", ask in asks()) {
        if let Ok(parsed) = parse(&text, &ask) {
            let good = |v: f64| v.is_finite() && v >= 0.0;
            let whole = match parsed.value {
                ParsedValue::Value { value } => good(value),
                ParsedValue::Range { low, high } => good(low) && good(high) && low < high,
                ParsedValue::Over { over } => good(over),
                ParsedValue::Under { under } => good(under),
                ParsedValue::Word { .. } => true,
            };
            prop_assert!(whole, "{text}: {parsed:?}");
        }
    }

    #[test]
    fn what_is_shown_reads_back(mantissa in 1.0f64..10.0, exponent in -6i32..11) {
        let value = mantissa * 10f64.powi(exponent);
        for ask in [insulation(), volts(), leak(), Asked::new("trip-time", "ms", false, None)] {
            if (ask.unit != Unit::Ohm && value > 1e4) || value < 1e-5 {
                continue;
            }
            match parse(&format(value, ask.unit), &ask).map(|p| p.value) {
                Ok(ParsedValue::Value { value: back }) => prop_assert!((back / value - 1.0).abs() < 0.0051, "{value} {back}"),
                other => prop_assert!(false, "{value}: {other:?}"),
            }
        }
    }
}
