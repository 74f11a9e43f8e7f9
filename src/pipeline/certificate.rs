//! The stages around a certificate of a tally: made and checked, read back, and what is read off it.

use std::path::Path;

use num_bigint::BigUint;

use super::Error;
use crate::budget::Budget;
use crate::judge::count::certificate::text::Mistake;
use crate::judge::count::certificate::{self, Certificate, Drawer, Formula, PickValues, Refusal};
use crate::judge::count::{Over, Tally};
use crate::problem::{Bits, Problem};
use crate::random::SplitMix64;
use crate::report::files::write_whole;
use crate::report::values::{CheckedFile, Refused};

/// A certificate of a tally that was checked.
#[derive(Debug)]
pub struct Certified {
    /// What it speaks of.
    pub formula: Formula,
    /// The certificate.
    pub certificate: Certificate,
    /// The count that it proves.
    pub count: BigUint,
}

/// Makes a certificate of a tally of the shown solutions, writes it where a file is named, and checks it as it was
/// written.
pub fn certify(problem: &Problem, tally: &Tally, file: Option<&Path>, budget: &Budget) -> Result<Certified, Error> {
    let formula = Formula::of(problem, Over::Shown);
    let mut certificate = certificate::certify(&formula, budget).ok_or(Error::Certificate(Refusal::OutOfTime))?;
    if let Some(file) = file {
        write_whole(file, |out| certificate::text::write(&certificate, out))?;
        let read = read_certificate(file, &formula)?;
        certificate = read.map_err(|mistake| Error::Fault(format!("a certificate just written: {mistake}")))?;
    }
    let count = certificate::check(&formula, &certificate, budget).map_err(Error::Certificate)?;
    if count < tally.low || count > tally.high {
        return Err(Error::Fault(format!("the certificate proves {count}, the tally is {}", tally.low)));
    }
    Ok(Certified { formula, certificate, count })
}

/// Checks a certificate file, from wherever it comes.
pub fn check_certificate(problem: &Problem, file: &Path, budget: &Budget) -> Result<CheckedFile, Error> {
    let formula = Formula::of(problem, Over::Shown);
    let name = file.display().to_string();
    let refused = |reason: String, undecided| Err(Refused { reason, undecided });
    Ok(match read_certificate(file, &formula)? {
        Err(mistake) => CheckedFile { file: name, kind: None, size: 0, verdict: refused(mistake.to_string(), false) },
        Ok(certificate) => {
            let verdict = certificate::check(&formula, &certificate, budget)
                .or_else(|refusal| refused(refusal.to_string(), refusal.is_undecided()));
            CheckedFile { file: name, kind: Some(certificate.kind()), size: certificate.size(), verdict }
        }
    })
}

fn read_certificate(file: &Path, formula: &Formula) -> Result<Result<Certificate, Mistake>, Error> {
    let text = std::fs::read(file).map_err(|error| Error::Read { path: file.to_owned(), error })?;
    Ok(certificate::text::read(&String::from_utf8_lossy(&text), formula.var_count))
}

/// In how many solutions each pick takes each value.
pub fn values(problem: &Problem, certified: &Certified, budget: &Budget) -> Result<Vec<PickValues>, Error> {
    certificate::values(problem, &certified.formula, &certified.certificate, budget).map_err(Error::Certificate)
}

/// Draws solutions, each with the same probability, one after the other and with repetition.
pub fn draw(problem: &Problem, certified: &Certified, number: usize, seed: u64) -> Result<Vec<Bits>, Error> {
    let Some(graph) = certified.certificate.graph() else { return Ok(Vec::new()) };
    let drawer = Drawer::new(&certified.formula, graph).map_err(Error::Certificate)?;
    let mut random = SplitMix64::new(seed);
    let drawn: Vec<Bits> = (0..number).map_while(|_| drawer.draw(&mut random)).collect();
    match drawn.iter().find(|bits| !problem.holds(bits)) {
        Some(bits) => Err(Error::Fault(format!("{bits} was drawn, which is no solution"))),
        None => Ok(drawn),
    }
}
