//! How times are told and kept: rounding by the rule of half up, grouping by
//! thousands and decimal places are common practice, no source.

use carrywise::timing::Time;

#[test]
fn times_are_told_with_the_places_that_mean_something() {
    let told = |thousandths| Time::thousandths(thousandths).to_string();
    for (thousandths, text) in [
        (0, "0"),
        (51_000, "51"),
        (1_234_567_000, "1,234,567"),
        (1_234_567, "1,234.6"),
        (-1_234_567, "-1,234.6"),
        (12_345, "12.3"),
        (12_350, "12.4"),
        (9_999, "10.00"),
        (1_005, "1.01"),
        (333, "0.333"),
        (-1, "-0.001"),
        (99_960, "100.0"),
    ] {
        assert_eq!(told(thousandths), text);
    }
}

#[test]
fn ticks_become_times_in_the_unit_of_their_model() {
    assert_eq!(Time::of_ticks(51, 1), 51);
    assert_eq!(Time::of_ticks(51, 1000), Time::thousandths(51));
    assert_eq!(Time::of_ticks(-2_500, 1000).to_string(), "-2.50");
    assert!(Time::of_ticks(i32::MAX, 1) > 0);
}

/// A record is read back as it was written, in YAML and in JSON, and whole times
/// stay whole numbers for whoever reads them with another program.
#[test]
fn times_survive_being_written_and_read() {
    for thousandths in [
        0,
        1,
        -1,
        333,
        1_000,
        51_000,
        413_333,
        i64::from(i32::MAX),
        i64::from(i32::MIN),
        i64::from(i32::MAX) * 1000,
    ] {
        let time = Time::thousandths(thousandths);
        let json = serde_json::to_string(&time).unwrap();
        assert_eq!(serde_json::from_str::<Time>(&json).unwrap(), time, "{json}");
        let yaml = serde_yaml::to_string(&time).unwrap();
        assert_eq!(serde_yaml::from_str::<Time>(&yaml).unwrap(), time, "{yaml}");
        assert_eq!(json.contains('.'), thousandths % 1000 != 0, "{json}");
    }
    assert!(serde_json::from_str::<Time>("1e30").is_err());
    assert!(serde_json::from_str::<Time>("9223372036854775807").is_err());
    assert!(serde_json::from_str::<Time>("\"3\"").is_err());
}
