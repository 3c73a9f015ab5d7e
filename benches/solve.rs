//! Fill and factor times and memory against the number of unknowns, beside LAPACK's zgetrf on the same machine in the same run.
//!
//!     cargo bench --bench solve
//!
//! The yardstick: SciPy's `scipy.linalg.lapack.zgetrf` on one thread, called from `python3`, on matrices e^{−jkR}/R of points on a helix
//! (complex symmetric like ours) of the same sizes, best of several runs. Without SciPy its column says so. Only ratios within one
//! run mean anything; a busy machine disturbs both sides alike.

use braidwise::interaction::{Extent, Factored, Interaction, Surroundings};
use braidwise::layout::{EarthAt, Layout};
use braidwise::mesh::{Density, Mesh};
use braidwise::station::{Document, Embedded};
use std::process::Command;
use std::time::Instant;

/// Mesh densities that give about 50 to 4,000 unknowns on the station below.
const DENSITIES: [f64; 8] = [0.35, 0.7, 1.0, 2.0, 5.0, 10.0, 20.0, 40.0];

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let text = std::fs::read_to_string("models/weir-gallery-40.toml")?;
    let station = Document::parse(&text, "weir-gallery-40.toml")?.station(&Embedded)?;
    let layout = Layout::place(&station).map_err(|faults| format!("{faults:?}"))?;
    let frequency_hz = 28.4e6;
    let earth = Surroundings::new(frequency_hz, EarthAt::Perfect, &Extent::of(&layout))?;
    let mut rows = Vec::new();
    for factor in DENSITIES {
        let mesh = Mesh::new(&layout, frequency_hz, Density { factor }, &[]);
        let started = Instant::now();
        let interaction = Interaction::new(mesh, true);
        let prepare_s = started.elapsed().as_secs_f64();
        let unknowns = interaction.mesh().unknowns;
        let repeats = if unknowns < 500 { 7 } else { 2 };
        let (mut fill_s, mut factor_s) = (f64::INFINITY, f64::INFINITY);
        for _ in 0..repeats {
            let started = Instant::now();
            let matrix = interaction.fill(&earth);
            fill_s = fill_s.min(started.elapsed().as_secs_f64());
            let started = Instant::now();
            std::hint::black_box(Factored::new(matrix)?);
            factor_s = factor_s.min(started.elapsed().as_secs_f64());
        }
        rows.push((unknowns, prepare_s, fill_s, factor_s));
    }
    let sizes: Vec<usize> = rows.iter().map(|r| r.0).collect();
    let lapack = lapack_seconds(&sizes);
    println!("station: {}; {} processor", station_name(&layout), braidwise::processor::instruction_set());
    println!("unknowns  once a mesh ms   fill ms  factor ms  zgetrf ms  factor/zgetrf  fill/factor  matrix MB");
    for (k, (n, prepare, fill, factor)) in rows.iter().enumerate() {
        let reference = lapack.as_ref().and_then(|l| l.get(k)).copied();
        let (shown, ratio) = match reference {
            Some(s) => (format!("{:9.2}", 1e3 * s), format!("{:13.2}", factor / s)),
            None => ("no scipy".to_string(), format!("{:>13}", "-")),
        };
        println!(
            "{n:8}  {:14.2} {:9.2}  {:9.2}  {shown:>9}  {ratio}  {:11.2}  {:9.1}",
            1e3 * prepare,
            1e3 * fill,
            1e3 * factor,
            fill / factor,
            16.0 * (*n as f64).powi(2) / 1e6
        );
    }
    Ok(())
}

fn station_name(layout: &Layout) -> &str {
    &layout.title
}

/// Best time of zgetrf for each size, s; `None` where SciPy is missing.
fn lapack_seconds(sizes: &[usize]) -> Option<Vec<f64>> {
    let script = "
import sys, time, numpy as np
from scipy.linalg.lapack import zgetrf
for n in map(int, sys.argv[1:]):
    t = np.linspace(0, 12, n)
    p = np.stack([np.cos(t), np.sin(t), 0.3 * t], 1)
    r = np.sqrt(((p[:, None] - p[None]) ** 2).sum(2) + 1e-4)
    a = np.asfortranarray(np.exp(-2j * r) / r)
    best = 1e9
    for _ in range(7 if n < 500 else 2):
        b = a.copy(order='F'); s = time.perf_counter(); zgetrf(b, overwrite_a=1); best = min(best, time.perf_counter() - s)
    print(best)
";
    let output = Command::new("python3")
        .arg("-c")
        .arg(script)
        .args(sizes.iter().map(ToString::to_string))
        .env("OPENBLAS_NUM_THREADS", "1")
        .env_remove("OPENBLAS_CORETYPE")
        .env_remove("OPENBLAS_L2_SIZE")
        .output()
        .ok()?;
    let text = String::from_utf8(output.stdout).ok()?;
    let times: Vec<f64> = text.lines().filter_map(|l| l.trim().parse().ok()).collect();
    (output.status.success() && times.len() == sizes.len()).then_some(times)
}
