//! Components: the parts into which the assignment under way splits what is left of the formula.
//!
//! Two open variables belong together if a given clause that is not yet satisfied holds both. The counts of parts
//! multiply: R. Bayardo, J. Pehoushek, "Counting models using connected components", AAAI 2000.
//!
//! Input:  the variables of the part above, and the assignment, with all conclusions drawn.
//! Output: the parts, smallest first, each with its variables in increasing order, its touched clauses (given clauses of
//!         three or more literals that have lost a literal and are not satisfied), how many of its variables count, and
//!         the variable to branch on; and how many counted variables are in no clause any more.
//!
//! The touched clauses and the variables together are the key of the cache. They determine the part exactly: a clause of
//! two with an open literal is whole, because its other literal is open too (or it would be satisfied, or have forced
//! this one); a longer clause that is not touched and not satisfied is whole, so it is given by its variables; and a
//! clause that was satisfied has an assigned variable, so it is neither whole nor listed. This is the key of M. Thurley,
//! "sharpSAT: counting models with advanced component caching and implicit BCP", SAT 2006, section 3.1, without the
//! clauses that the variables give away.
//!
//! Learnt clauses are not looked at: what they say is implied.

use super::lit::Lit;
use super::order::Guide;
use super::prepare::Class;
use super::propagate::Propagator;

/// A part of the formula, as ranges of the arenas of the [`Finder`].
#[derive(Clone, Copy, Debug)]
pub(crate) struct Part {
    /// Where its variables begin.
    pub(crate) vars: u32,
    /// How many variables.
    pub(crate) len: u32,
    /// Where its touched clauses begin.
    touched: u32,
    /// How many of those.
    touched_len: u32,
    /// How many of its variables count.
    pub(crate) counted: u32,
    /// How many of its variables may not be branched on.
    pub(crate) hidden: u32,
    /// The variable to branch on; `u32::MAX` in a part where none counts.
    pub(crate) choice: u32,
}

/// The variables of a part: a range of the arena.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Range {
    /// The first place.
    pub(crate) from: u32,
    /// One past the last place.
    pub(crate) to: u32,
}

impl Part {
    /// Its variables.
    pub(crate) fn range(&self) -> Range {
        Range { from: self.vars, to: self.vars + self.len }
    }
}

/// Where the arenas of the finder stood.
#[derive(Clone, Copy)]
pub(crate) struct Mark {
    vars: usize,
    touched: usize,
    parts: usize,
}

/// A clause of two is worth this many clauses of three when a variable is chosen (common practice in look-ahead
/// solvers; measured here: 2 against 1 and 4, over random formulas of two to four clauses a variable and queens).
const WEIGHTS: [f32; 7] = [0.0, 0.0, 2.0, 1.0, 0.4, 0.16, 0.07];

fn weight(open: usize) -> f32 {
    WEIGHTS.get(open).copied().unwrap_or(0.03)
}

/// Finds components; its arenas hold the parts of all nodes from the root to the current one.
pub(crate) struct Finder {
    /// The variables of parts.
    pub(crate) vars: Vec<u32>,
    /// The parts.
    pub(crate) parts: Vec<Part>,
    /// Variables looked at so far: the measure of work.
    pub(crate) work: u64,
    touched: Vec<u32>,
    queue: Vec<u32>,
    /// For a variable, the run in which it was met, and the part it went to.
    met: Vec<u32>,
    owner: Vec<u32>,
    /// For a place, the run in which the clause was met, doubled, plus one if it was satisfied.
    seen: Vec<u64>,
    run: u32,
}

impl Finder {
    /// For a formula of this size.
    pub(crate) fn new(var_count: usize, places: usize) -> Self {
        Self {
            vars: Vec::new(),
            parts: Vec::new(),
            work: 0,
            touched: Vec::new(),
            queue: Vec::new(),
            met: vec![0; var_count],
            owner: vec![0; var_count],
            seen: vec![0; places],
            run: 0,
        }
    }

    /// The variables of the whole formula, as the part above all.
    pub(crate) fn root(&mut self, var_count: usize) -> Range {
        self.vars.clear();
        self.touched.clear();
        self.parts.clear();
        self.vars.extend(0..var_count as u32);
        Range { from: 0, to: var_count as u32 }
    }

    /// Where the arenas stand.
    pub(crate) fn mark(&self) -> Mark {
        Mark { vars: self.vars.len(), touched: self.touched.len(), parts: self.parts.len() }
    }

    /// Drops what was found since.
    pub(crate) fn release(&mut self, mark: Mark) {
        self.vars.truncate(mark.vars);
        self.touched.truncate(mark.touched);
        self.parts.truncate(mark.parts);
    }

    /// Splits the open variables of a range. The parts are pushed to `parts`; the answer is how many counted variables
    /// are free.
    pub(crate) fn split(&mut self, p: &Propagator, guide: &Guide<'_>, above: Range) -> usize {
        let first = self.parts.len();
        self.next_run();
        let mut free = 0;
        for at in above.from..above.to {
            let var = self.vars[at as usize];
            if p.is_open(var as usize) && self.met[var as usize] != self.run {
                self.collect(p, guide, var, first);
                if self.queue.len() == 1 {
                    self.parts.pop();
                    self.owner[var as usize] = u32::MAX;
                    free += usize::from(guide.class[var as usize] == Class::Counted);
                }
            }
        }
        self.distribute(p, above, first);
        self.parts[first..].sort_by_key(|part| part.len);
        free
    }

    fn next_run(&mut self) {
        if self.run == u32::MAX {
            self.met.fill(0);
            self.seen.fill(0);
            self.run = 0;
        }
        self.run += 1;
    }

    /// Collects the component of a variable into the queue and pushes its part.
    fn collect(&mut self, p: &Propagator, guide: &Guide<'_>, start: u32, first: usize) {
        let owner = (self.parts.len() - first) as u32;
        let touched = self.touched.len();
        self.queue.clear();
        self.meet(start);
        let (mut counted, mut hidden) = (0, 0);
        let mut best = (f32::NEG_INFINITY, u32::MAX, u32::MAX);
        let mut at = 0;
        while at < self.queue.len() {
            let var = self.queue[at];
            at += 1;
            self.owner[var as usize] = owner;
            let (yes, no) = (self.visit(p, Lit::new(var, false)), self.visit(p, Lit::new(var, true)));
            let class = guide.class[var as usize];
            counted += u32::from(class == Class::Counted);
            if class == Class::Hidden {
                hidden += 1;
                continue;
            }
            let (rank, score) = guide.score(var as usize, yes, no);
            let better = rank < best.1 || (rank == best.1 && (score > best.0 || (score == best.0 && var < best.2)));
            if better || best.2 == u32::MAX {
                best = (score, rank, var);
            }
        }
        self.work += self.queue.len() as u64;
        let touched_len = self.touched.len() - touched;
        self.touched[touched..].sort_unstable();
        self.parts.push(Part {
            vars: 0,
            len: self.queue.len() as u32,
            touched: touched as u32,
            touched_len: touched_len as u32,
            counted,
            hidden,
            choice: if counted == 0 { u32::MAX } else { best.2 },
        });
    }

    fn meet(&mut self, var: u32) {
        if self.met[var as usize] != self.run {
            self.met[var as usize] = self.run;
            self.queue.push(var);
        }
    }

    /// Meets the neighbours of an open literal; gives the weight of its open clauses.
    fn visit(&mut self, p: &Propagator, lit: Lit) -> f32 {
        let mut sum = 0.0;
        for &other in p.store.twos.of(lit.index()) {
            if p.value(other) == 0 {
                self.meet(other.var() as u32);
                sum += WEIGHTS[2];
            }
        }
        for three in p.store.threes.of(lit.index()) {
            let (a, b) = (p.value(three.a), p.value(three.b));
            if a == 1 || b == 1 {
                continue;
            }
            if a == 0 && b == 0 {
                self.meet(three.a.var() as u32);
                self.meet(three.b.var() as u32);
                sum += WEIGHTS[3];
            } else {
                self.meet(if a == 0 { three.a } else { three.b }.var() as u32);
                self.touch(three.place);
                sum += WEIGHTS[2];
            }
        }
        for &id in p.store.longs.of(lit.index()) {
            sum += self.visit_long(p, id);
        }
        sum
    }

    fn touch(&mut self, place: u32) {
        let stamp = u64::from(self.run) << 32;
        if self.seen[place as usize] != stamp {
            self.seen[place as usize] = stamp;
            self.touched.push(place);
        }
    }

    fn visit_long(&mut self, p: &Propagator, id: u32) -> f32 {
        let place = p.store.three_count + id as usize;
        let known = self.seen[place];
        if known >> 32 == u64::from(self.run) {
            return f32::from_bits(known as u32);
        }
        let clause = p.store.long(id);
        let mut open = 0;
        let mut satisfied = false;
        for &lit in clause {
            match p.value(lit) {
                1 => {
                    satisfied = true;
                    break;
                }
                0 => open += 1,
                _ => {}
            }
        }
        let sum = if satisfied { 0.0 } else { weight(open) };
        self.seen[place] = u64::from(self.run) << 32 | u64::from(sum.to_bits());
        if satisfied {
            return 0.0;
        }
        for &lit in clause {
            if p.value(lit) == 0 {
                self.meet(lit.var() as u32);
            }
        }
        if open < clause.len() {
            self.touched.push(place as u32);
        }
        sum
    }

    /// Gives each part its variables, in increasing order.
    fn distribute(&mut self, p: &Propagator, above: Range, first: usize) {
        let mut end = self.vars.len() as u32;
        for part in &mut self.parts[first..] {
            part.vars = end;
            end += part.len;
            part.len = 0;
        }
        self.vars.resize(end as usize, 0);
        for at in above.from..above.to {
            let var = self.vars[at as usize];
            let owner = self.owner[var as usize];
            if p.is_open(var as usize) && owner != u32::MAX {
                let part = &mut self.parts[first + owner as usize];
                self.vars[(part.vars + part.len) as usize] = var;
                part.len += 1;
            }
        }
    }

    /// The variables of a part.
    pub(crate) fn vars_of(&self, part: &Part) -> &[u32] {
        &self.vars[part.vars as usize..][..part.len as usize]
    }

    /// Writes the key of a part: its variables and its touched clauses as differences, seven bits a byte.
    pub(crate) fn write_key(&self, part: &Part, key: &mut Vec<u8>) {
        key.clear();
        push_number(key, part.len);
        let touched = &self.touched[part.touched as usize..][..part.touched_len as usize];
        for list in [self.vars_of(part), touched] {
            let mut last = 0;
            for &item in list {
                push_number(key, item - last);
                last = item;
            }
        }
    }
}

fn push_number(key: &mut Vec<u8>, mut number: u32) {
    while number >= 0x80 {
        key.push(number as u8 | 0x80);
        number >>= 7;
    }
    key.push(number as u8);
}
