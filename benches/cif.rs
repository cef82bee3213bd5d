//! Speed of CIF: text to tokens, text to a checked structure, structure to text, at 100,000 atoms.
//!
//! `cargo bench --bench cif -- --million DIR` instead writes one file of 1,000,000 atoms to DIR, reads it back once, and
//! prints the rates and the peak memory: `benches/cif_beside_gemmi.py` does the same with gemmi.

use criterion::{Criterion, Throughput, criterion_group};
use interstice::crystal::{Fractional, Lattice, Parameters, Site, Structure};
use interstice::format::cif::{Description, Mode, Source, parse, read_structures, write};
use interstice::ion::{Element, Ion};
use std::hint::black_box;
use std::path::Path;
use std::time::Instant;

/// About `atoms` ions of two kinds on a cubic array 2 Å apart, coordinates off the array so that all digits are used.
fn structure(atoms: usize) -> Structure {
    let n = (atoms as f64).cbrt().round() as usize;
    let ion = |symbol, charge| Ion::new(Element::from_symbol(symbol).expect("an element"), charge);
    let ions = [ion("Mg", 2), ion("O", -2)];
    let edge = 2.0 * n as f64;
    let parameters = Parameters { a: edge, b: edge, c: edge, alpha: 90.0, beta: 90.0, gamma: 90.0 };
    let sites = (0..n * n * n)
        .map(|i| {
            let at = |k: usize, off: f64| (k as f64 + off) / n as f64;
            let off = (i * 2_654_435_761 % 1_000_003) as f64 / 1e7;
            let position = Fractional::new(at(i % n, off), at(i / n % n, 0.1 - off), at(i / n / n, off / 2.0));
            Site::full(position, ions[(i + i / n + i / n / n) % 2].into())
        })
        .collect();
    Structure { lattice: Lattice::from_parameters(&parameters).expect("a lattice"), sites }
}

fn explicit() -> Description {
    Description { explicit: true, ..Description::default() }
}

fn cif(c: &mut Criterion) {
    let structure = structure(100_000);
    let text = write(&structure, &explicit()).expect("a file");
    let mut group = c.benchmark_group(format!("CIF of {} atoms", structure.sites.len()));
    group.sample_size(10).throughput(Throughput::Bytes(text.len() as u64));
    group.bench_function("write", |b| b.iter(|| write(black_box(&structure), &explicit())));
    let source = Source::decode("bench", text.as_bytes()).expect("a text");
    group.bench_function("tokens", |b| b.iter(|| parse(black_box(&source), Mode::Lenient)));
    group.bench_function("structure", |b| {
        b.iter(|| {
            let source = Source::decode("bench", black_box(text.as_bytes())).expect("a text");
            let document = parse(&source, Mode::Lenient).expect("a document");
            read_structures(&document)
        })
    });
    group.finish();
}

/// Peak resident memory of this process, MB; where the system tells it.
fn peak_memory() -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find_map(|line| line.strip_prefix("VmHWM:"))?;
    Some(line.trim().trim_end_matches(" kB").parse::<f64>().ok()? / 1024.0)
}

/// Writes the file, or reads it if it is there: two runs, so that the peak memory of reading is that of reading alone.
fn million(folder: &Path) {
    let path = folder.join("million.cif");
    if !path.exists() {
        let structure = structure(1_000_000);
        let started = Instant::now();
        let text = write(&structure, &explicit()).expect("a file");
        let seconds = started.elapsed().as_secs_f64();
        std::fs::write(&path, &text).expect("a file on disk");
        println!("written\t{} atoms\t{:.1} MB/s", structure.sites.len(), text.len() as f64 / 1e6 / seconds);
        return;
    }
    let started = Instant::now();
    let bytes = std::fs::read(&path).expect("the file");
    let source = Source::decode("million", &bytes).expect("a text");
    let in_memory = Instant::now();
    let document = parse(&source, Mode::Lenient).expect("a document");
    let tokens = in_memory.elapsed().as_secs_f64();
    let read = read_structures(&document).remove(0).expect("a structure");
    let seconds = started.elapsed().as_secs_f64();
    let size = bytes.len() as f64 / 1e6;
    assert!(read.warnings.is_empty(), "{:?}", read.warnings);
    println!("tokens\t{:.1} MB/s", size / tokens);
    println!("file to checked structure\t{} sites\t{:.1} MB/s", read.structure.sites.len(), size / seconds);
    println!("peak memory\t{:.0} MB for a file of {size:.0} MB", peak_memory().unwrap_or(f64::NAN));
}

criterion_group!(benches, cif);

fn main() {
    let arguments: Vec<String> = std::env::args().collect();
    match arguments.iter().position(|a| a == "--million").and_then(|i| arguments.get(i + 1)) {
        Some(folder) => million(Path::new(folder)),
        None => {
            benches();
            Criterion::default().configure_from_args().final_summary();
        }
    }
}
