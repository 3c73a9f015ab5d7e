//! A length scan against solves, on one thread, in one run: 100 lengths of coax at one frequency against the longest solved on its own.
//!
//! A solve is a direct fill, one factorisation and one right side. A scan is the whole study but for the trim rule (which takes a
//! solve at a second frequency): placing, meshing, solving, far field, windows. Prints ratios; the aim is below 12 at 150
//! unknowns and below 8 at 300.

use braidwise::interaction::{Extent, Interaction, Surroundings};
use braidwise::layout::{Earth, Layout};
use braidwise::mesh::{Anchor, Density, Mesh};
use braidwise::ports::PortModel;
use braidwise::station::{Document, Embedded, Station};
use braidwise::study::cut::{Lengths, Method, Question, cut};
use std::time::{Duration, Instant};

/// Lengths in a scan.
const LENGTHS: usize = 100;

fn station(earth: &str, frequency: &str, body: &str) -> Station {
    let text = format!(
        "title = \"bench\"\nunit = \"m\"\n[earth]\n{earth}\n[points]\nfeed = [0, 0, 9]\ntip = [0, 20.1, 9]\n\
         entry = [0, -1.2, 8.6]\nfar = [0, -92, 8.6]\n[[wire]]\nname = \"radiator\"\npath = [\"feed\", \"tip\"]\ndiameter = \"2 mm\"\n\
         [coax]\ncable = \"RG-58\"\npath = [\"feed\", \"entry\", \"far\"]\nlength = 20\n[feed]\nat = \"feed\"\nhot = [\"radiator\"]\n\
         cold = [\"coax\"]\ntransformer = {{ ratio = \"49:1\" }}\n[radio]\nbody = {body}\n[operation]\npower = \"100 W\"\n\
         frequencies = [\"{frequency}\"]\n"
    );
    Document::parse(&text, "bench").and_then(|d| d.station(&Embedded)).expect("the bench's station is sound")
}

/// Time this thread has run, where the system says so, else the time of day: a busy machine then does not count.
fn now() -> Duration {
    static START: std::sync::OnceLock<Instant> = std::sync::OnceLock::new();
    let of_day = START.get_or_init(Instant::now).elapsed();
    let text = std::fs::read_to_string("/proc/thread-self/schedstat").unwrap_or_default();
    text.split(' ').next().and_then(|ns| ns.parse().ok()).map_or(of_day, Duration::from_nanos)
}

/// Mean time of one run, over a third of a second or more.
fn mean<T>(mut run: impl FnMut() -> T) -> Duration {
    let (start, wall) = (now(), Instant::now());
    let mut runs = 0;
    while wall.elapsed() < Duration::from_millis(350) || runs < 3 {
        std::hint::black_box(run());
        runs += 1;
    }
    (now() - start) / runs
}

fn main() {
    let one = rayon::ThreadPoolBuilder::new().num_threads(1).build().expect("a pool of one thread");
    let perfect = "kind = \"perfect\"";
    let soil = "kind = \"soil\"\npermittivity = 13\nconductivity = \"5 mS/m\"";
    println!(
        "{:<34} {:>8} {:>10} {:>10} {:>10} {:>9} {:>9}",
        "case", "unknowns", "solve", "scan", "alone", "ratio", "alone"
    );
    for (name, earth, hz, density, to_m, body) in [
        ("perfect earth, open end", perfect, 28.4e6, 1.0, 30.0, "\"none\""),
        ("perfect earth, open end, finer", perfect, 28.4e6, 1.7, 44.0, "\"none\""),
        ("perfect earth, radio's case", perfect, 28.4e6, 1.7, 44.0, "\"0.3 m\""),
        ("soil, open end, finer", soil, 28.4e6, 1.7, 44.0, "\"none\""),
    ] {
        let station = station(earth, &format!("{} MHz", hz / 1e6), body);
        let mut longest = station.clone();
        if let Some(coax) = &mut longest.coax {
            coax.length_m = Some(to_m.into());
        }
        let layout = Layout::place(&longest).expect("the longest can be built");
        let shield = layout.coax.as_ref().map_or(0, |c| c.conductor);
        let density = Density { factor: density };
        let anchor = Anchor::new(&layout, &[shield]);
        let surroundings = Surroundings::new(hz, layout.earth.at(hz), &Extent::of(&layout)).expect("sound soil");
        let mesh = Mesh::anchored(&layout, hz, density, &anchor);
        let with_image = layout.earth != Earth::None;
        let solve = one.install(|| {
            mean(|| {
                let interaction = Interaction::new(Mesh::anchored(&layout, hz, density, &anchor), with_image);
                PortModel::solve(&interaction, &surroundings)
            })
        });
        let lengths_m: Vec<f64> = (0..LENGTHS).map(|n| to_m - 10.0 + 0.1 * (n + 1) as f64).collect();
        let stations = [("nominal".to_string(), station)];
        let question = |method| Question {
            first: Lengths { conductor: "coax".into(), lengths_m: lengths_m.clone() },
            second: None,
            stock: Vec::new(),
            method,
            density,
            trim: false,
        };
        let scan = one.install(|| mean(|| cut(&stations, &question(Method::Shared))));
        let alone = one.install(|| {
            let start = now();
            std::hint::black_box(cut(&stations, &question(Method::Alone)).is_ok());
            now() - start
        });
        let in_solves = |t: Duration| t.as_secs_f64() / solve.as_secs_f64();
        println!(
            "{name:<34} {:>8} {:>8.2}ms {:>8.1}ms {:>8.0}ms {:>9.2} {:>9.1}",
            mesh.unknowns,
            solve.as_secs_f64() * 1e3,
            scan.as_secs_f64() * 1e3,
            alone.as_secs_f64() * 1e3,
            in_solves(scan),
            in_solves(alone)
        );
    }
}
