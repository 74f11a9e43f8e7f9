//! What a simulation showed: a table and a plot in text, the `simulation` object, and the plot as SVG.

use std::fmt::Write;

use serde_json::{Map, Value, json};

use crate::places::Places;
use crate::problem::{Bits, Problem};
use crate::report::json::values_json;
use crate::report::summary::{line, values};
use crate::search::simulate::Simulation;

/// At most so many rows of the table.
const ROWS: usize = 24;
/// The length of the longest bar.
const BAR: usize = 50;

/// A problem that the results are read in.
#[derive(Clone, Copy, Debug)]
pub struct Terms<'a> {
    /// The problem.
    pub problem: &'a Problem,
    /// Where its bits are.
    pub places: &'a Places,
}

impl Terms<'_> {
    /// The bits of the problem for a result, and whether it is a solution.
    fn read(&self, result: &Bits) -> Option<(Bits, bool)> {
        let bits = (result.len() == self.places.search_len()).then(|| self.places.assignment(result))?;
        let holds = self.problem.holds(&bits);
        Some((bits, holds))
    }
}

/// `simulation`, with at most `list` results.
pub fn json(simulation: &Simulation, terms: Option<Terms<'_>>, list: usize) -> Value {
    let number = |number: Option<u64>| number.map(|number| number.to_string());
    let result = |bits: &Bits, figure: (&str, Value)| {
        let mut object = Map::new();
        object.insert("measured".to_owned(), bits.to_string().into());
        object.insert(figure.0.to_owned(), figure.1);
        if let Some((problem_bits, holds)) = terms.and_then(|terms| terms.read(bits)) {
            object.insert("holds".to_owned(), holds.into());
            let problem = terms.expect("just read in them").problem;
            object.insert("values".to_owned(), values_json(problem, &problem_bits).into());
        }
        Value::Object(object)
    };
    let drawn = simulation.drawn.iter().take(list).map(|(bits, count)| result(bits, ("count", (*count).into())));
    let likeliest =
        simulation.likeliest.iter().take(list).map(|(bits, chance)| result(bits, ("probability", (*chance).into())));
    json!({
        "way": simulation.way.name(),
        "bits": simulation.bits,
        "space": number(simulation.space),
        "marked": number(simulation.marked),
        "iterations": simulation.iterations.to_string(),
        "success": simulation.success,
        "stride": simulation.stride.to_string(),
        "curve": simulation.curve,
        "shots": simulation.drawn.iter().map(|one| one.1).sum::<u64>(),
        "hits": hits(simulation, terms),
        "drawn": drawn.collect::<Vec<_>>(),
        "likeliest": likeliest.collect::<Vec<_>>(),
        "notes": simulation.notes,
    })
}

/// How many drawn results are solutions.
fn hits(simulation: &Simulation, terms: Option<Terms<'_>>) -> Option<u64> {
    let terms = terms?;
    let hit = |bits: &Bits| terms.read(bits).is_some_and(|(_, holds)| holds);
    Some(simulation.drawn.iter().filter(|(bits, _)| hit(bits)).map(|one| one.1).sum())
}

/// Lines of text: figures, the curve, at most `list` results.
pub fn text(simulation: &Simulation, terms: Option<Terms<'_>>, list: usize) -> String {
    let mut text = String::new();
    let way = match simulation.way.name() {
        "classes" => "exact identity, one pass",
        "steps" => "iteration by iteration",
        _ => "gate by gate",
    };
    text += &line("simulated", format!("{} bits, {way}", simulation.bits));
    if let (Some(marked), Some(space)) = (simulation.marked, simulation.space) {
        text += &line("marked", format!("{marked} of {space} states, read from the file"));
    }
    if let Some(success) = simulation.success {
        text += &line("success", format!("{success:.12} after {} iterations", simulation.iterations));
    }
    simulation.notes.iter().for_each(|note| text += &line("note", note));
    if simulation.partial {
        text += &line("partial", "the time ran out before the last iteration");
    }
    text += &curve(simulation);
    text += &results(simulation, terms, list);
    text
}

/// The points that are shown: evenly spread, the best and the last among them.
fn shown(simulation: &Simulation) -> Vec<usize> {
    let len = simulation.curve.len();
    let mut rows: Vec<usize> = (0..len.min(ROWS)).map(|row| row * len / len.min(ROWS)).collect();
    rows.extend((0..len).max_by(|&a, &b| simulation.curve[a].total_cmp(&simulation.curve[b]).then(b.cmp(&a))));
    rows.extend(len.checked_sub(1));
    rows.sort_unstable();
    rows.dedup();
    rows
}

fn curve(simulation: &Simulation) -> String {
    let mut text = String::new();
    if simulation.curve.is_empty() {
        return text;
    }
    _ = writeln!(text, "\niterations     success");
    for at in shown(simulation) {
        let chance = simulation.curve[at];
        let bar = "#".repeat((chance.clamp(0.0, 1.0) * BAR as f64).round() as usize);
        _ = writeln!(text, "{:>10}  {chance:.8}  {bar}", at as u64 * simulation.stride);
    }
    text
}

fn results(simulation: &Simulation, terms: Option<Terms<'_>>, list: usize) -> String {
    let mut text = String::new();
    let in_terms = |bits: &Bits| {
        let read = terms.and_then(|terms| Some((terms.read(bits)?, terms.problem)));
        read.map_or_else(String::new, |((bits, holds), problem)| {
            format!("  {}  {}", if holds { "holds" } else { "fails" }, values(problem, &bits))
        })
    };
    if !simulation.drawn.is_empty() {
        let all: u64 = simulation.drawn.iter().map(|one| one.1).sum();
        let hits = hits(simulation, terms).map_or_else(String::new, |hits| format!(", {hits} of them solutions"));
        _ = writeln!(text, "\n{all} drawn{hits}");
        let mut sorted: Vec<&(Bits, u64)> = simulation.drawn.iter().collect();
        sorted.sort_by(|a, b| b.1.cmp(&a.1).then_with(|| a.0.cmp(&b.0)));
        for (bits, count) in sorted.into_iter().take(list) {
            _ = writeln!(text, "{count:>8}  {bits}{}", in_terms(bits));
        }
    } else if !simulation.likeliest.is_empty() && list > 0 {
        _ = writeln!(text, "\nlikeliest results");
        for (bits, chance) in simulation.likeliest.iter().take(list) {
            _ = writeln!(text, "{chance:.9}  {bits}{}", in_terms(bits));
        }
    }
    text
}

/// The drawn results as plain lines, each a string and how often it came: what `shots` reads.
pub fn shot_lines(simulation: &Simulation) -> String {
    simulation.drawn.iter().map(|(bits, count)| format!("{bits} {count}\n")).collect()
}

/// The success by iteration as an SVG picture of 640 by 320.
pub fn svg(simulation: &Simulation, title: &str) -> String {
    const LEFT: f64 = 60.0;
    const TOP: f64 = 40.0;
    const WIDTH: f64 = 560.0;
    const HEIGHT: f64 = 230.0;
    let last = (simulation.curve.len().max(2) - 1) as f64;
    let x = |at: f64| LEFT + WIDTH * at / last;
    let y = |chance: f64| TOP + HEIGHT * (1.0 - chance);
    let step = simulation.curve.len().div_ceil(2048).max(1);
    let points: String = (0..simulation.curve.len())
        .filter(|at| at % step == 0 || at + 1 == simulation.curve.len())
        .map(|at| format!("{:.2},{:.2} ", x(at as f64), y(simulation.curve[at])))
        .collect();
    let escaped = title.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;");
    let mut svg = String::from(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 640 320\" font-family=\"sans-serif\" font-size=\"12\">\n\
         <rect width=\"640\" height=\"320\" fill=\"white\"/>\n",
    );
    _ = writeln!(svg, "<text x=\"{LEFT}\" y=\"24\" font-size=\"14\">{escaped}</text>");
    for tenths in [0.0, 2.5, 5.0, 7.5, 10.0] {
        let (chance, at) = (tenths / 10.0, y(tenths / 10.0));
        _ = writeln!(
            svg,
            "<line x1=\"{LEFT}\" y1=\"{at:.1}\" x2=\"{}\" y2=\"{at:.1}\" stroke=\"#ddd\"/>\n\
             <text x=\"{}\" y=\"{:.1}\" text-anchor=\"end\">{chance}</text>",
            LEFT + WIDTH,
            LEFT - 8.0,
            at + 4.0
        );
    }
    for quarter in 0..=4 {
        let at = (last * f64::from(quarter) / 4.0).round();
        _ = writeln!(
            svg,
            "<text x=\"{:.1}\" y=\"{}\" text-anchor=\"middle\">{}</text>",
            x(at),
            TOP + HEIGHT + 18.0,
            at as u64 * simulation.stride
        );
    }
    _ = writeln!(svg, "<text x=\"{}\" y=\"310\" text-anchor=\"middle\">iterations</text>", LEFT + WIDTH / 2.0);
    _ = writeln!(
        svg,
        "<polyline points=\"{}\" fill=\"none\" stroke=\"#1f5fa8\" stroke-width=\"1.5\"/>",
        points.trim_end()
    );
    svg + "</svg>\n"
}
