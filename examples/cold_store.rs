//! Heat that leaks into a cold store through the foot of its wall, as a guaranteed interval.
//!
//! An invented section: frozen room on the left, hall on the right, a sandwich panel standing in a steel channel on the
//! floor. The channel short-cuts the insulation; a variant has a thermal break in it. Run it with
//! `cargo run --release --example cold_store`, or with `-- --json` for the figures alone.
//!
//! A calculation aid: to be checked by a licensed practitioner under the local code.

use std::error::Error;
use std::path::Path;
use std::sync::Arc;
use std::time::Instant;

use hypercircle::export::{Picture, Table, VtuFile, format_interval};
use hypercircle::mesh::{Mesh, Outline, between, polygon, rectangle};
use hypercircle::{Answer, Diffusion, Enclosure, Extreme, Tolerance};
use serde_json::json;

const FROZEN_ROOM: f64 = -22.0; // °C
const HALL: f64 = 18.0; // °C
const HALL_HUMIDITY: f64 = 0.60;

/// The section, in meters: x from the frozen room to the hall, y = 0 on the floor.
fn section() -> Result<Mesh<2>, Box<dyn Error>> {
    let mut foot = Outline::new();
    // Floor.
    foot.region("concrete", rectangle((-1.0, -0.43), (1.15, -0.28)))?; // base slab
    foot.region("floor insulation", rectangle((-1.0, -0.28), (0.15, -0.12)))?;
    foot.region("concrete", rectangle((-1.0, -0.12), (0.0, 0.0)))?; // wearing slab, frozen room
    foot.region("kerb", rectangle((0.0, -0.12), (0.15, 0.0)))?;
    foot.region("concrete", rectangle((0.15, -0.28), (1.15, 0.0)))?; // hall slab
    foot.hole("cable duct", rectangle((0.055, -0.09), (0.095, -0.05)))?;
    // Panel with its two skins; a cavity is left under its foot.
    foot.region("core", rectangle((0.0, 0.018), (0.15, 1.0)))?;
    foot.region("cavity", rectangle((0.0, 0.003), (0.15, 0.018)))?;
    foot.region("steel", rectangle((0.0, 0.003), (0.0008, 1.0)))?;
    foot.region("steel", rectangle((0.1492, 0.003), (0.15, 1.0)))?;
    // Base channel: a plate with two flanges; the middle of the plate may be a thermal break.
    let channel = [
        (-0.003, 0.0),
        (0.153, 0.0),
        (0.153, 0.08),
        (0.15, 0.08),
        (0.15, 0.003),
        (0.0, 0.003),
        (0.0, 0.08),
        (-0.003, 0.08),
    ];
    foot.region("steel", polygon(&channel))?;
    foot.region("break", rectangle((0.055, 0.0), (0.095, 0.003)))?;
    // Surfaces.
    foot.side("frozen floor", between((-1.0, 0.0), (-0.003, 0.0)))?;
    for (from, to) in [((-0.003, 0.0), (-0.003, 0.08)), ((-0.003, 0.08), (0.0, 0.08)), ((0.0, 0.08), (0.0, 1.0))] {
        foot.side("frozen wall", between(from, to))?;
    }
    foot.side("hall floor", between((0.153, 0.0), (1.15, 0.0)))?;
    for (from, to) in [((0.153, 0.0), (0.153, 0.08)), ((0.153, 0.08), (0.15, 0.08)), ((0.15, 0.08), (0.15, 1.0))] {
        foot.side("hall wall", between(from, to))?;
    }
    Ok(foot.mesh(0.06)?)
}

/// The section with a channel of steel through and through, or with a break of another material in it.
fn leak(mesh: &Arc<Mesh<2>>, break_conductivity: f64) -> Result<Answer<2>, Box<dyn Error>> {
    let problem = Diffusion::on(mesh.clone())
        .conductivity("steel", 50.0) // W/(m K)
        .conductivity("break", break_conductivity)
        .conductivity("core", 0.023)
        .conductivity("cavity", 0.09)
        .conductivity("floor insulation", 0.035)
        .conductivity("kerb", 0.25)
        .conductivity("concrete", 2.0)
        .robin("frozen wall", 12.0, FROZEN_ROOM) // W/(m² K), °C
        .robin("frozen floor", 8.0, FROZEN_ROOM)
        .robin("hall wall", 7.7, HALL)
        .robin("hall floor", 5.9, HALL)
        .order(2);
    Ok(problem.solve_within(Tolerance::FlowRelative(9e-4))?)
}

/// Dew point in °C by the Magnus formula over water (WMO No. 8, from memory): 17.62 and 243.12 °C.
fn dew_point(temperature: f64, humidity: f64) -> f64 {
    let gamma = humidity.ln() + 17.62 * temperature / (243.12 + temperature);
    243.12 * gamma / (17.62 - gamma)
}

/// Coldest point of the surfaces towards the hall.
fn coldest(answer: &Answer<2>) -> Result<Extreme<2>, Box<dyn Error>> {
    let (wall, floor) = (answer.extremes_on("hall wall")?.least, answer.extremes_on("hall floor")?.least);
    Ok(if wall.value < floor.value { wall } else { floor })
}

/// All results of a run.
#[derive(Debug)]
pub(crate) struct Report {
    designed: Answer<2>,
    variant: Answer<2>,
    heat_flow: Enclosure,
    variant_heat_flow: Enclosure,
    started: Instant,
}

impl Report {
    /// From outline to results.
    pub(crate) fn new() -> Result<Self, Box<dyn Error>> {
        let started = Instant::now();
        let mesh = Arc::new(section()?);
        let designed = leak(&mesh, 50.0)?; // steel through and through
        let variant = leak(&mesh, 0.25)?; // polyamide in the middle
        let (heat_flow, variant_heat_flow) = (designed.exchanged_flow()?, variant.exchanged_flow()?);
        Ok(Self { designed, variant, heat_flow, variant_heat_flow, started })
    }

    /// The figures as one JSON document.
    pub(crate) fn json(&self) -> Result<String, Box<dyn Error>> {
        let interval = |e: &Enclosure| json!({ "value": e.value, "lower": e.lower, "upper": e.upper });
        let document = json!({
            "heat_flow": interval(&self.heat_flow),
            "variant_heat_flow": interval(&self.variant_heat_flow),
            "balance": self.designed.balance()?.defect(),
            "unknowns": self.designed.unknown_count(),
            "seconds": self.started.elapsed().as_secs_f64(),
        });
        Ok(serde_json::to_string_pretty(&document)?)
    }

    /// The note that is handed over.
    pub(crate) fn note(&self) -> Result<String, Box<dyn Error>> {
        let dew = dew_point(HALL, HALL_HUMIDITY);
        let mut results = Table::new(&["", "steel channel", "with thermal break"]);
        let flow = |e: &Enclosure| format_interval(e.value, e.lower, e.upper, "W/m");
        results = results.row(["heat that leaks in", &flow(&self.heat_flow), &flow(&self.variant_heat_flow)]);
        let mut rows: [Vec<String>; 6] = Default::default();
        for answer in [&self.designed, &self.variant] {
            let (cold, balance) = (coldest(answer)?, answer.balance()?);
            rows[0].push(format!("{:.1} °C at ({:.3}, {:.3}) m", cold.value, cold.at[0], cold.at[1]));
            rows[1].push(if cold.value < dew { "yes" } else { "no" }.to_owned());
            rows[2].push(format!("{:.1e} W/m of {:.1} W/m", balance.defect(), balance.size()));
            rows[3].push(format!("{:.2} %", 100.0 * answer.relative_bound()?));
            rows[4].push(format!("{} in {} cells", answer.unknown_count(), answer.mesh().cell_count()));
            rows[5].push(format!("{}", answer.certificate()?.guarantee()));
        }
        let labels =
            ["coldest hall surface", "condensation", "balance defect", "error of the field", "unknowns", "interval"];
        for (label, row) in labels.into_iter().zip(rows) {
            results = results.row(std::iter::once(label.to_owned()).chain(row));
        }
        Ok(format!(
            "Foot of a cold-store wall (an invented section)\n\n\
             Frozen room {FROZEN_ROOM} °C, hall {HALL} °C at {:.0} % humidity: dew point {dew:.1} °C.\n\n{results}\n\
             The intervals of the heat flow are guaranteed for this model of the section, up to rounding.\n\
             The thermal break saves {:.0} % of the heat flow. From outline to note: {:.2} s.\n\n\
             A calculation aid: to be checked by a licensed practitioner under the local code.\n",
            100.0 * HALL_HUMIDITY,
            100.0 * (1.0 - self.variant_heat_flow.value / self.heat_flow.value),
            self.started.elapsed().as_secs_f64(),
        ))
    }

    /// Writes picture, field file and note to a folder.
    pub(crate) fn save(&self, folder: &Path) -> Result<(), Box<dyn Error>> {
        std::fs::create_dir_all(folder)?;
        let field = self.designed.field("temperature", "°C");
        let fluxes = self.designed.fluxes();
        let cold = coldest(&self.designed)?;
        Picture::of(self.designed.mesh())
            .title("Foot of a cold-store wall: temperature and heat flux")
            .length_unit("m")
            .field(&field)
            .contours(14)
            .arrows(&fluxes, "W/m²")
            .marker(cold.at, &format!("coldest hall surface {:.1} °C", cold.value))
            .save(folder.join("temperature.svg"))?;
        VtuFile::of(self.designed.mesh())
            .field(&field)
            .cell_vectors("heat flux", &fluxes)
            .cell_values("share of the squared error bound", self.designed.certificate()?.shares())
            .save(folder.join("section.vtu"))?;
        std::fs::write(folder.join("note.txt"), self.note()?)?;
        Ok(())
    }
}

/// Runs the example with its arguments; `folder` takes what it writes.
pub(crate) fn run(arguments: &[String], folder: &Path) -> Result<String, Box<dyn Error>> {
    let report = Report::new()?;
    if arguments.iter().any(|a| a == "--json") {
        return report.json();
    }
    report.save(folder)?;
    Ok(format!("{}\nPicture, field file and note are in {}.", report.note()?, folder.display()))
}

fn main() -> Result<(), Box<dyn Error>> {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    println!("{}", run(&arguments, Path::new("target/cold_store"))?);
    Ok(())
}
