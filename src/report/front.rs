//! The front of circuits: a table, JSON, and a picture.

use std::fmt::Write;

use comfy_table::{CellAlignment, Table, presets};
use serde_json::{Value, json};

use crate::circuit::{Figures, Level};

/// A table, one circuit a row, fewest qubits first.
pub fn table(level: Level, front: &[Figures]) -> String {
    let mut table = Table::new();
    table.load_style(presets::NOTHING);
    let has_t = level >= Level::CliffordT;
    let feedback = level == Level::Feedback;
    let mut header = vec!["qubits", if has_t { "T" } else { "ANDs" }];
    header.extend(feedback.then_some("T on average"));
    header.extend(has_t.then_some("T-depth"));
    header.extend(["depth", "gates"]);
    table.set_header(&header);
    for one in front {
        let mut row = vec![one.qubits.to_string(), cost(level, one).to_string()];
        row.extend(feedback.then(|| format!("{:.1}", one.t_count_expected)));
        row.extend(has_t.then(|| one.t_depth.to_string()));
        row.extend([one.depth.to_string(), one.gates.to_string()]);
        table.add_row(row);
    }
    for column in table.column_iter_mut() {
        column.set_cell_alignment(CellAlignment::Right);
    }
    table.trim_fmt() + "\n"
}

/// T gates, or ANDs (each gate with *c* controls as *c* - 1) at a level without T gates.
fn cost(level: Level, figures: &Figures) -> u64 {
    if level >= Level::CliffordT { figures.t_count } else { figures.and_gates }
}

/// `front`.
pub fn json(level: Level, front: &[Figures]) -> Value {
    let has_t = level >= Level::CliffordT;
    let one = |figures: &Figures| {
        json!({
            "qubits": figures.qubits,
            "and_gates": (!has_t).then_some(figures.and_gates),
            "t_count": has_t.then_some(figures.t_count),
            "t_count_expected": (level == Level::Feedback).then_some(figures.t_count_expected),
            "t_depth": has_t.then_some(figures.t_depth),
            "depth": figures.depth,
            "gates": figures.gates,
        })
    };
    front.iter().map(one).collect()
}

const WIDTH: f64 = 640.0;
const HEIGHT: f64 = 400.0;
const MARGIN: f64 = 60.0;

/// A picture in SVG: the cost over the qubits, both on logarithmic axes; a circle's shade tells the depth.
pub fn picture(level: Level, front: &[Figures]) -> String {
    let name = if level >= Level::CliffordT { "T gates" } else { "ANDs" };
    let across = Axis::over(front.iter().map(|one| one.qubits));
    let up = Axis::over(front.iter().map(|one| cost(level, one)));
    let shade = Axis::over(front.iter().map(|one| one.depth));
    let mut text = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {WIDTH} {HEIGHT}\" font-family=\"sans-serif\" \
         font-size=\"12\">\n<title>{name} over qubits at level {level}; darker is deeper</title>\n\
         <rect width=\"{WIDTH}\" height=\"{HEIGHT}\" fill=\"white\"/>\n"
    );
    let (right, bottom) = (WIDTH - MARGIN / 2.0, HEIGHT - MARGIN);
    let mut line = |x1: f64, y1: f64, x2: f64, y2: f64| {
        let _ = writeln!(text, "<line x1=\"{x1:.1}\" y1=\"{y1:.1}\" x2=\"{x2:.1}\" y2=\"{y2:.1}\" stroke=\"#888\"/>");
    };
    line(MARGIN, bottom, right, bottom);
    line(MARGIN, MARGIN / 2.0, MARGIN, bottom);
    let x = |value: u64| MARGIN + across.place(value) * (right - MARGIN);
    let y = |value: u64| bottom - up.place(value) * (bottom - MARGIN / 2.0);
    let mut words = |x: f64, y: f64, anchor: &str, words: &str| {
        let _ = writeln!(text, "<text x=\"{x:.1}\" y=\"{y:.1}\" text-anchor=\"{anchor}\">{words}</text>");
    };
    for value in across.ends() {
        words(x(value), bottom + 18.0, "middle", &value.to_string());
    }
    for value in up.ends() {
        words(MARGIN - 8.0, y(value) + 4.0, "end", &value.to_string());
    }
    words(f64::midpoint(MARGIN, right), bottom + 40.0, "middle", "qubits (both axes logarithmic; darker is deeper)");
    words(MARGIN, MARGIN / 2.0 - 10.0, "middle", name);
    for one in front {
        let light = 200.0 - 180.0 * shade.place(one.depth);
        let _ = writeln!(
            text,
            "<circle cx=\"{:.1}\" cy=\"{:.1}\" r=\"4\" fill=\"rgb({light:.0},{light:.0},220)\"><title>{} qubits, {} \
             {name}, depth {}</title></circle>",
            x(one.qubits),
            y(cost(level, one)),
            one.qubits,
            cost(level, one),
            one.depth
        );
    }
    text + "</svg>\n"
}

/// A logarithmic axis from the smallest to the largest value.
struct Axis {
    low: u64,
    high: u64,
}

impl Axis {
    fn over(values: impl Iterator<Item = u64> + Clone) -> Self {
        Self { low: values.clone().min().unwrap_or(0), high: values.max().unwrap_or(0) }
    }

    fn ends(&self) -> impl Iterator<Item = u64> {
        let two = self.high != self.low;
        std::iter::once(self.low).chain(two.then_some(self.high))
    }

    /// The place of a value, from 0 to 1.
    fn place(&self, value: u64) -> f64 {
        let log = |value: u64| (value as f64 + 1.0).ln();
        if self.high == self.low { 0.5 } else { (log(value) - log(self.low)) / (log(self.high) - log(self.low)) }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn table_json_and_picture_show_each_circuit() {
        let one = |qubits, t_count, depth| Figures { qubits, t_count, depth, ..Figures::default() };
        let front = [one(8, 400, 90), one(16, 100, 20)];
        let text = table(Level::CliffordT, &front);
        assert_eq!(text.lines().count(), 3);
        assert!(text.lines().nth(1).unwrap().contains("400"), "{text}");
        assert_eq!(json(Level::Feedback, &front)[1]["t_count"], 100);
        assert_eq!(json(Level::Toffoli, &front)[1]["t_count"], Value::Null);
        let picture = picture(Level::CliffordT, &front);
        assert_eq!(picture.matches("<circle").count(), 2);
        assert!(picture.contains("8 qubits, 400 T gates, depth 90"));
    }
}
