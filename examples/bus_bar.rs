//! A current-carrying bar in one dimension: where is it hottest, and how much heat leaves at either end?
//!
//! An invented bar of copper and aluminum in series. Joule losses along it, cooled by air all along, its terminal held at
//! a temperature, its other end blown at. Run it with `cargo run --release --example bus_bar`.
//!
//! A calculation aid: to be checked by a licensed practitioner under the local code.

use std::error::Error;
use std::path::Path;

use hypercircle::Diffusion;
use hypercircle::export::CurvePicture;
use hypercircle::mesh::{Interval, Toward};

const CURRENT: f64 = 1200.0; // A
const WIDTH: f64 = 0.06; // m
const THICKNESS: f64 = 0.01; // m
const AIR: f64 = 35.0; // °C
const TERMINAL: f64 = 60.0; // °C
const FILM_ALONG: f64 = 8.0; // W/(m² K)
const FILM_END: f64 = 45.0; // W/(m² K)

/// Runs the example; `folder` takes the picture.
pub(crate) fn run(folder: &Path) -> Result<String, Box<dyn Error>> {
    let section = WIDTH * THICKNESS;
    let perimeter = 2.0 * (WIDTH + THICKNESS);
    let density = CURRENT / section; // A/m²
    let losses = |resistivity: f64| resistivity * density * density; // W/m³
    let exchange = FILM_ALONG * perimeter / section; // W/(m³ K)

    let mesh = Interval::graded(0.0, 1.6, 240, Toward::Both, 20.0)
        .region("copper", 0.0, 0.7)
        .region("aluminum", 0.7, 1.6)
        .ends("terminal", "free end")
        .mesh()?;
    // −k u″ + c (u − u_air) = q: the air is a reaction and a source.
    let bar = Diffusion::on(mesh)
        .conductivity("copper", 390.0) // W/(m K)
        .conductivity("aluminum", 220.0)
        .reaction_everywhere(exchange)
        .source("copper", losses(2.0e-8) + exchange * AIR)
        .source("aluminum", losses(3.3e-8) + exchange * AIR)
        .dirichlet("terminal", TERMINAL)
        .robin("free end", FILM_END, AIR)
        .solve()?;

    let hottest = bar.extremes().most;
    let (terminal, end) = (-bar.inflow("terminal")? * section, -bar.inflow("free end")? * section);
    let balance = bar.balance()?;
    let certificate = bar.certificate()?;
    std::fs::create_dir_all(folder)?;
    let field = bar.field("temperature", "°C");
    CurvePicture::of(bar.mesh(), &field)
        .title("Temperature along the bar")
        .length_unit("m")
        .save(folder.join("curve.svg"))?;

    Ok(format!(
        "Bar of copper and aluminum at {CURRENT} A (invented)\n\n\
         hottest               {:.2} °C at {:.3} m\n\
         free end              {:.2} °C\n\
         heat to the terminal  {terminal:.3} W\n\
         heat at the free end  {end:.3} W\n\
         balance defect        {:.1e} of {:.1} W\n\
         guaranteed error      {:.3} % of the energy norm ({})\n\
         unknowns              {} ({})\n\n\
         The curve is in {}. A calculation aid: to be checked by a licensed practitioner under the local code.",
        hottest.value,
        hottest.at[0],
        bar.value(&[1.6])?,
        balance.defect() * section,
        balance.size() * section,
        100.0 * bar.relative_bound()?,
        certificate.guarantee(),
        bar.unknown_count(),
        bar.outcome().method,
        folder.display(),
    ))
}

fn main() -> Result<(), Box<dyn Error>> {
    println!("{}", run(Path::new("target/bus_bar"))?);
    Ok(())
}
