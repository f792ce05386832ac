//! The examples run, and give what they promise.

use std::path::PathBuf;

#[allow(dead_code)] // its main function
#[path = "../examples/bus_bar.rs"]
mod bus_bar;
#[allow(dead_code)] // its main function
#[path = "../examples/cold_store.rs"]
mod cold_store;

fn folder(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_TARGET_TMPDIR")).join(name)
}

#[test]
fn cold_store_gives_two_narrow_intervals_and_its_files() {
    let folder = folder("cold_store");
    let json = cold_store::run(&["--json".to_owned()], &folder).unwrap();
    let figures: serde_json::Value = serde_json::from_str(&json).unwrap();
    for name in ["heat_flow", "variant_heat_flow"] {
        let number = |key: &str| figures[name][key].as_f64().unwrap();
        let (value, lower, upper) = (number("value"), number("lower"), number("upper"));
        assert!(lower < value && value < upper && upper - lower <= 1e-3 * value, "{name}: {value} [{lower}, {upper}]");
    }
    assert!(figures["variant_heat_flow"]["upper"].as_f64() < figures["heat_flow"]["lower"].as_f64());
    assert!(figures["balance"].as_f64().unwrap().abs() < 1e-8);
    assert!(figures["unknowns"].as_u64().unwrap() > 1000);
    let note = cold_store::run(&[], &folder).unwrap();
    assert!(note.contains("licensed practitioner") && note.contains("condensation"));
    for file in ["temperature.svg", "section.vtu", "note.txt"] {
        assert!(folder.join(file).metadata().unwrap().len() > 500, "{file}");
    }
}

#[test]
fn bus_bar_closes_its_balance_and_draws_its_curve() {
    let note = bus_bar::run(&folder("bus_bar")).unwrap();
    assert!(note.contains("hottest") && note.contains("tridiagonal"));
    assert!(folder("bus_bar").join("curve.svg").exists());
}
