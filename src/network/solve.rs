//! Two ways to the same phasors: exact (every topology folded anew, ideal branches merged) and
//! quick (one pattern for all switching states, further branches by a rank-one column).
//!
//! Long because both solvers answer the same questions and are read side by side.

use num_complex::Complex64;

use super::circuit::{Circuit, Emf};
use super::law::{Kind, Link, Values, link};
use super::state::Switching;
use crate::knowledge::SourceMode;
use crate::numeric::fold::{Folded, Pattern};
use crate::numeric::special;

const ZERO: Complex64 = Complex64::new(0.0, 0.0);

/// A branch added for an instrument: node, node, S.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Extra {
    /// First node.
    pub a: usize,
    /// Second node.
    pub b: usize,
    /// S.
    pub y: Complex64,
}

/// Voltages of all nodes to remote earth, and currents of all branches from `a` to `b`.
#[derive(Clone, Debug)]
pub struct Phasors {
    /// V.
    pub volts: Vec<Complex64>,
    /// A.
    pub amps: Vec<Complex64>,
}

/// Anything that solves the circuit in a switching state.
pub trait Solver {
    /// The circuit.
    fn circuit(&self) -> &Circuit;
    /// The parameter values.
    fn values(&self) -> Values<'_>;
    /// The AC solution with further branches.
    fn phasors(&self, sw: &Switching, extra: &[Extra]) -> Phasors;
    /// Impedance between two groups of nodes, each joined, sources shorted; `None` is infinite.
    fn impedance(&self, sw: &Switching, a: &[usize], b: &[usize], kind: Kind) -> Option<Complex64>;
}

/// The phasor of a source, V: lines lag by 120° each.
fn emf_volts(circuit: &Circuit, emf: &Emf, values: Values) -> Complex64 {
    let volts = match (emf.source, circuit.volts_override) {
        (None, Some(v)) => v,
        _ => values.theta[values.common.volts.0],
    };
    match emf.line {
        1 => Complex64::new(volts, 0.0),
        2 => Complex64::new(-0.5 * volts, -(3f64.sqrt()) / 2.0 * volts),
        _ => Complex64::new(-0.5 * volts, 3f64.sqrt() / 2.0 * volts),
    }
}

fn active(emf: &Emf, sw: &Switching) -> bool {
    emf.source
        .is_none_or(|s| sw.sources[s] == SourceMode::Backup)
}

/// Groups of kept nodes held together by ideal sources: group and offset of each kept node.
/// Group 0 is the soil at zero volts.
struct Groups {
    of: Vec<(usize, usize, Complex64)>,
    count: usize,
}

fn groups(
    circuit: &Circuit,
    map: &dyn Fn(usize) -> usize,
    emfs: &[(usize, usize, Complex64)],
) -> Groups {
    let mut of: Vec<(usize, usize, Complex64)> = vec![(map(circuit.soil), 0, ZERO)];
    let mut count = 1;
    for &(plus, minus, volts) in emfs {
        let (plus, minus) = (map(plus), map(minus));
        let found = |of: &[(usize, usize, Complex64)], n: usize| {
            of.iter().find(|g| g.0 == n).map(|g| (g.1, g.2))
        };
        let (group, base) = match found(&of, minus) {
            Some(g) => g,
            None => {
                of.push((minus, count, ZERO));
                count += 1;
                (count - 1, ZERO)
            }
        };
        if found(&of, plus).is_none() {
            of.push((plus, group, base + volts));
        }
    }
    Groups { of, count }
}

impl Groups {
    fn kept(&self) -> Vec<usize> {
        self.of.iter().map(|g| g.0).collect()
    }

    /// Volts of the kept nodes from what is left between them and the currents pushed into them.
    fn solve(
        &self,
        between: &[(usize, usize, Complex64)],
        injected: Option<&[Complex64]>,
        offsets: bool,
        volts: &mut [Complex64],
    ) {
        let n = self.count;
        let place = |node: usize| {
            self.of
                .iter()
                .find(|g| g.0 == node)
                .map(|g| (g.1, if offsets { g.2 } else { ZERO }))
        };
        let mut m = vec![vec![ZERO; n]; n];
        let mut rhs = vec![ZERO; n];
        for &(a, b, y) in between {
            let (Some((ga, ea)), Some((gb, eb))) = (place(a), place(b)) else {
                continue;
            };
            if ga == gb {
                continue;
            }
            m[ga][ga] += y;
            m[gb][gb] += y;
            m[ga][gb] -= y;
            m[gb][ga] -= y;
            let j = y * (eb - ea);
            rhs[ga] += j;
            rhs[gb] -= j;
        }
        if let Some(injected) = injected {
            for g in &self.of {
                rhs[g.1] += injected[g.0];
            }
        }
        // Group 0 is at zero; two or three others at most.
        let mut level = vec![ZERO; n];
        for k in 1..n {
            if m[k][k] == ZERO {
                continue;
            }
            for i in k + 1..n {
                let f = m[i][k] / m[k][k];
                if f != ZERO {
                    let row = m[k].clone();
                    for (x, r) in m[i].iter_mut().zip(&row).skip(k) {
                        *x -= f * r;
                    }
                    let r = rhs[k];
                    rhs[i] -= f * r;
                }
            }
        }
        for k in (1..n).rev() {
            if m[k][k] == ZERO {
                continue;
            }
            let mut sum = rhs[k];
            for j in k + 1..n {
                sum -= m[k][j] * level[j];
            }
            level[k] = sum / m[k][k];
        }
        for g in &self.of {
            volts[g.0] = level[g.1] + if offsets { g.2 } else { ZERO };
        }
    }
}

fn links(circuit: &Circuit, sw: &Switching, values: Values, kind: Kind) -> Vec<Link> {
    (0..circuit.branches.len())
        .map(|i| link(circuit, i, sw, values, kind))
        .collect()
}

/// Solves each question anew: exact to rounding, ideal branches and all.
pub struct ExactSolver<'a> {
    /// Circuit with its edits.
    pub circuit: &'a Circuit,
    /// Values.
    pub values: Values<'a>,
}

/// Nodes that ideal branches make one.
struct Merged {
    root: Vec<usize>,
}

impl Merged {
    fn new(nodes: usize) -> Self {
        Self {
            root: (0..nodes).collect(),
        }
    }
    fn find(&self, mut n: usize) -> usize {
        while self.root[n] != n {
            n = self.root[n];
        }
        n
    }
    fn join(&mut self, a: usize, b: usize) -> bool {
        let (a, b) = (self.find(a), self.find(b));
        if a == b {
            return false;
        }
        let (low, high) = (a.min(b), a.max(b));
        self.root[high] = low;
        true
    }
}

impl Solver for ExactSolver<'_> {
    fn circuit(&self) -> &Circuit {
        self.circuit
    }

    fn values(&self) -> Values<'_> {
        self.values
    }

    fn phasors(&self, sw: &Switching, extra: &[Extra]) -> Phasors {
        let c = self.circuit;
        let links = links(c, sw, self.values, Kind::Ac);
        let mut merged = Merged::new(c.nodes.len());
        let mut tree = Vec::new();
        for (i, l) in links.iter().enumerate() {
            if *l == Link::Ideal && merged.join(c.branches[i].a, c.branches[i].b) {
                tree.push(i);
            }
        }
        let find = |n: usize| merged.find(n);
        let emfs: Vec<_> = c
            .emfs
            .iter()
            .filter(|e| active(e, sw))
            .map(|e| (e.plus, e.minus, emf_volts(c, e, self.values)))
            .collect();
        let groups = groups(c, &find, &emfs);
        let mut edges = Vec::new();
        let mut ys = Vec::new();
        for (i, l) in links.iter().enumerate() {
            if let Link::Through(y) = l {
                edges.push((find(c.branches[i].a), find(c.branches[i].b)));
                ys.push(*y);
            }
        }
        for e in extra {
            edges.push((find(e.a), find(e.b)));
            ys.push(e.y);
        }
        let pattern = Pattern::new(c.nodes.len(), &edges, &groups.kept());
        let folded = pattern.fold(&ys);
        let mut volts = vec![ZERO; c.nodes.len()];
        groups.solve(&pattern.between_kept(&folded), None, true, &mut volts);
        pattern.pull(&folded, None, &mut volts);
        let all: Vec<Complex64> = (0..c.nodes.len()).map(|n| volts[find(n)]).collect();
        let mut amps = vec![ZERO; c.branches.len()];
        for (i, l) in links.iter().enumerate() {
            if let Link::Through(y) = l {
                amps[i] = y * (all[c.branches[i].a] - all[c.branches[i].b]);
            }
        }
        self.ideal_currents(&tree, &links, extra, &all, &mut amps);
        Phasors { volts: all, amps }
    }

    fn impedance(&self, sw: &Switching, a: &[usize], b: &[usize], kind: Kind) -> Option<Complex64> {
        let c = self.circuit;
        let links = links(c, sw, self.values, kind);
        let mut merged = Merged::new(c.nodes.len());
        for (i, l) in links.iter().enumerate() {
            if *l == Link::Ideal {
                merged.join(c.branches[i].a, c.branches[i].b);
            }
        }
        for e in c.emfs.iter().filter(|e| active(e, sw)) {
            merged.join(e.plus, e.minus);
        }
        for group in [a, b] {
            for pair in group.windows(2) {
                merged.join(pair[0], pair[1]);
            }
        }
        let (&a, &b) = (a.first()?, b.first()?);
        let (a, b) = (merged.find(a), merged.find(b));
        if a == b {
            return Some(ZERO);
        }
        let mut edges = Vec::new();
        let mut ys = Vec::new();
        for (i, l) in links.iter().enumerate() {
            if let Link::Through(y) = l {
                edges.push((merged.find(c.branches[i].a), merged.find(c.branches[i].b)));
                ys.push(*y);
            }
        }
        let pattern = Pattern::new(c.nodes.len(), &edges, &[a, b]);
        let folded = pattern.fold(&ys);
        let y: Complex64 = pattern.between_kept(&folded).iter().map(|k| k.2).sum();
        (y != ZERO).then(|| y.conj() / y.norm_sqr())
    }
}

impl ExactSolver<'_> {
    /// Currents of ideal branches by Kirchhoff's current law: each parts its cluster in two, and what
    /// leaves one part over branches with impedance came through it. Of ideal branches in a ring, the
    /// last carries nothing: their division is undefined.
    fn ideal_currents(
        &self,
        tree: &[usize],
        links: &[Link],
        extra: &[Extra],
        volts: &[Complex64],
        amps: &mut [Complex64],
    ) {
        let c = self.circuit;
        if tree.is_empty() {
            return;
        }
        // Net current that each node sends out over branches with impedance.
        let mut out = vec![ZERO; c.nodes.len()];
        for (i, l) in links.iter().enumerate() {
            if matches!(l, Link::Through(_)) {
                out[c.branches[i].a] += amps[i];
                out[c.branches[i].b] -= amps[i];
            }
        }
        for e in extra {
            let i = e.y * (volts[e.a] - volts[e.b]);
            out[e.a] += i;
            out[e.b] -= i;
        }
        let mut fixed = vec![false; c.nodes.len()];
        for e in &c.emfs {
            fixed[e.plus] = true;
            fixed[e.minus] = true;
        }
        for &cut in tree {
            let side = |start: usize| {
                let mut seen = vec![start];
                let mut next = 0;
                while next < seen.len() {
                    let n = seen[next];
                    next += 1;
                    for &t in tree {
                        if t == cut {
                            continue;
                        }
                        let (a, b) = (c.branches[t].a, c.branches[t].b);
                        let other = if a == n {
                            b
                        } else if b == n {
                            a
                        } else {
                            continue;
                        };
                        if !seen.contains(&other) {
                            seen.push(other);
                        }
                    }
                }
                seen
            };
            let far = side(c.branches[cut].b);
            amps[cut] = if far.iter().any(|&n| fixed[n]) {
                let near = side(c.branches[cut].a);
                -near.iter().map(|&n| out[n]).sum::<Complex64>()
            } else {
                far.iter().map(|&n| out[n]).sum()
            };
        }
    }
}

/// What is made once for a topology and serves every switching state and every draw of values.
#[derive(Clone, Debug)]
pub struct Wiring {
    /// Circuit with its edits.
    pub circuit: Circuit,
    pattern: Pattern,
    kept: Vec<usize>,
}

impl Wiring {
    /// Plans the elimination of a circuit.
    pub fn new(circuit: Circuit) -> Self {
        let edges: Vec<_> = circuit.branches.iter().map(|b| (b.a, b.b)).collect();
        let emfs: Vec<_> = circuit
            .emfs
            .iter()
            .map(|e| (e.plus, e.minus, ZERO))
            .collect();
        let kept = groups(&circuit, &|n| n, &emfs).kept();
        let pattern = Pattern::new(circuit.nodes.len(), &edges, &kept);
        Self {
            circuit,
            pattern,
            kept,
        }
    }
}

/// A factor kept for a switching state.
struct Factor {
    sw: Switching,
    kind: Kind,
    ys: Vec<Complex64>,
    folded: Folded<Complex64>,
    groups: Groups,
    base: Vec<Complex64>,
    between: Vec<(usize, usize, Complex64)>,
}

/// Solves by one pattern; a contact without resistance counts as 0.1 µΩ.
pub struct QuickSolver<'a> {
    wiring: &'a Wiring,
    values: Values<'a>,
    factors: std::cell::RefCell<Vec<std::rc::Rc<Factor>>>,
}

impl<'a> QuickSolver<'a> {
    /// A solver of this wiring at these values.
    pub fn new(wiring: &'a Wiring, values: Values<'a>) -> Self {
        Self {
            wiring,
            values,
            factors: std::cell::RefCell::new(Vec::new()),
        }
    }

    fn factor(&self, sw: &Switching, kind: Kind) -> std::rc::Rc<Factor> {
        if let Some(f) = self
            .factors
            .borrow()
            .iter()
            .find(|f| f.kind == kind && f.sw == *sw)
        {
            return f.clone();
        }
        let c = &self.wiring.circuit;
        let ys: Vec<Complex64> = (0..c.branches.len())
            .map(|i| match link(c, i, sw, self.values, kind) {
                Link::Open => ZERO,
                Link::Ideal => Complex64::new(1e7, 0.0),
                Link::Through(y) => y,
            })
            .collect();
        let folded = self.wiring.pattern.fold(&ys);
        let volts_of = |e: &Emf| {
            if kind == Kind::Ac && active(e, sw) {
                emf_volts(c, e, self.values)
            } else {
                ZERO
            }
        };
        // A source that does not run still joins its nodes here; its inner branch is open then.
        let emfs: Vec<_> = c
            .emfs
            .iter()
            .map(|e| (e.plus, e.minus, volts_of(e)))
            .collect();
        let groups = groups(c, &|n| n, &emfs);
        let between = self.wiring.pattern.between_kept(&folded);
        let mut base = vec![ZERO; c.nodes.len()];
        if kind == Kind::Ac {
            groups.solve(&between, None, true, &mut base);
            self.wiring.pattern.pull(&folded, None, &mut base);
        }
        let factor = std::rc::Rc::new(Factor {
            sw: sw.clone(),
            kind,
            ys,
            folded,
            groups,
            base,
            between,
        });
        self.factors.borrow_mut().push(factor.clone());
        factor
    }

    /// Volts of every node when 1 A goes in at `a` and out at `b`, sources shorted.
    fn column(&self, f: &Factor, a: usize, b: usize) -> Vec<Complex64> {
        let n = self.wiring.circuit.nodes.len();
        let mut j = vec![ZERO; n];
        j[a] += 1.0;
        j[b] -= 1.0;
        let pushed = j.clone();
        let mut pushed_all = pushed;
        self.wiring.pattern.push(&f.folded, &mut pushed_all);
        let mut volts = vec![ZERO; n];
        f.groups
            .solve(&f.between, Some(&pushed_all), false, &mut volts);
        self.wiring
            .pattern
            .pull(&f.folded, Some(&pushed_all), &mut volts);
        volts
    }
}

impl Solver for QuickSolver<'_> {
    fn circuit(&self) -> &Circuit {
        &self.wiring.circuit
    }

    fn values(&self) -> Values<'_> {
        self.values
    }

    fn phasors(&self, sw: &Switching, extra: &[Extra]) -> Phasors {
        let f = self.factor(sw, Kind::Ac);
        let c = &self.wiring.circuit;
        let mut volts = f.base.clone();
        // Each further branch by its column; columns of later ones already see the earlier.
        let mut columns: Vec<(Extra, Vec<Complex64>, Complex64)> = Vec::new();
        for e in extra {
            let mut col = self.column(&f, e.a, e.b);
            for (p, pc, d) in &columns {
                let k = p.y * (col[p.a] - col[p.b]) / d;
                for (x, y) in col.iter_mut().zip(pc) {
                    *x -= k * y;
                }
            }
            let d = Complex64::new(1.0, 0.0) + e.y * (col[e.a] - col[e.b]);
            let k = e.y * (volts[e.a] - volts[e.b]) / d;
            for (x, y) in volts.iter_mut().zip(&col) {
                *x -= k * y;
            }
            columns.push((*e, col, d));
        }
        let amps = c
            .branches
            .iter()
            .zip(&f.ys)
            .map(|(b, y)| y * (volts[b.a] - volts[b.b]))
            .collect();
        Phasors { volts, amps }
    }

    fn impedance(&self, sw: &Switching, a: &[usize], b: &[usize], kind: Kind) -> Option<Complex64> {
        let f = self.factor(sw, kind);
        let (&a0, &b0) = (a.first()?, b.first()?);
        // Nodes joined within a group: short them one by one with columns (an ideal short is y → ∞).
        let mut columns: Vec<(usize, usize, Vec<Complex64>, Complex64)> = Vec::new();
        let reduce = |col: &mut Vec<Complex64>,
                      columns: &[(usize, usize, Vec<Complex64>, Complex64)]| {
            for (pa, pb, pc, z) in columns {
                let k = (col[*pa] - col[*pb]) / z;
                for (x, y) in col.iter_mut().zip(pc) {
                    *x -= k * y;
                }
            }
        };
        for group in [a, b] {
            for pair in group.windows(2) {
                let mut col = self.column(&f, pair[0], pair[1]);
                reduce(&mut col, &columns);
                let z = col[pair[0]] - col[pair[1]];
                if special::abs(z) > 1e-9 {
                    columns.push((pair[0], pair[1], col, z));
                }
            }
        }
        let mut col = self.column(&f, a0, b0);
        reduce(&mut col, &columns);
        let z = col[a0] - col[b0];
        (special::abs(z) < 1e12 && self.joined(&f, a, b)).then_some(z)
    }
}

impl QuickSolver<'_> {
    /// Whether anything at all conducts between two groups of nodes.
    fn joined(&self, f: &Factor, a: &[usize], b: &[usize]) -> bool {
        let c = &self.wiring.circuit;
        let mut merged = Merged::new(c.nodes.len());
        for (branch, y) in c.branches.iter().zip(&f.ys) {
            if *y != ZERO {
                merged.join(branch.a, branch.b);
            }
        }
        for pair in self.wiring.kept.windows(2) {
            let same = |n: usize| f.groups.of.iter().find(|g| g.0 == n).map(|g| g.1);
            if same(pair[0]) == same(pair[1]) {
                merged.join(pair[0], pair[1]);
            }
        }
        a.iter()
            .any(|&x| b.iter().any(|&y| merged.find(x) == merged.find(y)))
    }
}
