//! The record: the whole design as JSON, schema 1, for scripts.
//!
//! Fields stand in a fixed order, everything is named as in the project, and the text depends on nothing but the
//! project and the design, so that two records can be compared line by line. A stage that could not run is `null`.
//! Linear in the size of the design.

use serde::{Serialize, Serializer};

use crate::base::{Code, Column, Finding, Row};
use crate::codes::values::Coded;
use crate::design::values::Design;
use crate::gates::values::Cost;
use crate::handoff::lines::to_lines;
use crate::handoff::words::{Reason, reasons};
use crate::logic::values::{Equations, EssentialHazard};
use crate::merge::values::{Merged, Pair, PairTable, Reduced, RowSet, Verdict};
use crate::project::Project;
use crate::project::choices::Discipline;
use crate::proof::values::{Proof, RaceKind, Races};
use crate::spec::values::{FlowTable, Spec};

/// The version of the record's layout.
pub const SCHEMA: u32 = 1;

/// The record of a design, with one newline at the end.
pub fn record(project: &Project, design: &Design) -> String {
    let spec = design.spec.as_deref();
    let reduced = design.merged.as_deref().and_then(|m| m.reduced.as_ref());
    let coded = design.coded.as_deref();
    let equations = design.equations.as_deref();
    let record = Record {
        schema: SCHEMA,
        title: &project.title,
        inputs: &project.inputs,
        outputs: &project.outputs,
        discipline: match project.discipline {
            Discipline::Single => "single",
            Discipline::Burst => "burst",
        },
        findings: design.findings.iter().map(found).collect(),
        merging: both(spec, design.merged.as_deref()).map(|(s, m)| merging(s, m)),
        codes: both(reduced, coded).map(|(r, c)| codes(r, c, design.races.as_deref())),
        equations: both(reduced, equations).map(|(r, e)| equation_part(r, e)),
        proof: both(both(reduced, coded), design.proof.as_deref()).map(|((r, c), p)| proof(r, c, p)),
        cost: design.cost.as_ref().map(cost),
    };
    to_lines(&record).expect("names and numbers always serialise")
}

fn both<A, B>(a: Option<A>, b: Option<B>) -> Option<(A, B)> {
    a.zip(b)
}

/// A map that keeps its order.
struct Map<V>(Vec<(String, V)>);

impl<V: Serialize> Serialize for Map<V> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_map(self.0.iter().map(|(k, v)| (k, v)))
    }
}

#[derive(Serialize)]
struct Record<'a> {
    schema: u32,
    title: &'a str,
    inputs: &'a [String],
    outputs: &'a [String],
    discipline: &'static str,
    findings: Vec<FindingPart<'a>>,
    merging: Option<MergingPart<'a>>,
    codes: Option<CodesPart<'a>>,
    equations: Option<EquationsPart<'a>>,
    proof: Option<ProofPart<'a>>,
    cost: Option<CostPart>,
}

#[derive(Serialize)]
struct FindingPart<'a> {
    level: &'static str,
    code: &'a str,
    text: &'a str,
    at: PlacePart<'a>,
}

#[derive(Serialize)]
struct PlacePart<'a> {
    row: Option<&'a str>,
    column: Option<&'a str>,
}

fn found(finding: &Finding) -> FindingPart<'_> {
    FindingPart {
        level: finding.level.word(),
        code: finding.code,
        text: &finding.text,
        at: PlacePart { row: finding.at.row.as_deref(), column: finding.at.column.as_deref() },
    }
}

#[derive(Serialize)]
struct TotalStatePart<'a> {
    row: &'a str,
    column: String,
}

#[derive(Serialize)]
struct MergingPart<'a> {
    pairs: Pairs<'a>,
    maximal_compatibles: Vec<Vec<&'a str>>,
    /// Whether the list before is complete; there can be more than anyone could list.
    maximal_complete: bool,
    cover: Vec<Vec<&'a str>>,
    further_covers: Vec<Vec<Vec<&'a str>>>,
    lower_bound: usize,
    proved: bool,
    rows: Vec<RowPart<'a>>,
    initial: Option<TotalStatePart<'a>>,
}

#[derive(Serialize)]
struct PairPart<'a> {
    rows: [&'a str; 2],
    verdict: &'static str,
    #[serde(skip_serializing_if = "Option::is_none")]
    implies: Option<Vec<[&'a str; 2]>>,
    #[serde(skip_serializing_if = "Option::is_none")]
    conflict: Option<ConflictPart<'a>>,
    #[serde(skip_serializing_if = "Option::is_none")]
    struck_by: Option<[&'a str; 2]>,
    #[serde(skip_serializing_if = "Option::is_none")]
    pass: Option<usize>,
}

#[derive(Serialize)]
struct ConflictPart<'a> {
    /// `null` where outputs belong to rows.
    column: Option<String>,
    output: &'a str,
}

#[derive(Serialize)]
struct RowPart<'a> {
    name: &'a str,
    members: Vec<&'a str>,
    cells: Map<CellPart<'a>>,
}

#[derive(Serialize)]
struct CellPart<'a> {
    next: &'a str,
    outputs: String,
}

fn merging<'a>(spec: &'a Spec, merged: &'a Merged) -> MergingPart<'a> {
    let table = &spec.table;
    let reduced = merged.reduced.as_ref();
    MergingPart {
        pairs: Pairs(spec, &merged.pairs),
        maximal_compatibles: merged.maximal.iter().map(|s| names_of(table, s)).collect(),
        maximal_complete: merged.maximal_complete,
        cover: merged.cover.iter().map(|s| names_of(table, s)).collect(),
        further_covers: merged
            .further
            .iter()
            .map(|cover| cover.iter().map(|s| names_of(table, s)).collect())
            .collect(),
        lower_bound: merged.lower_bound,
        proved: merged.bound.proved(),
        rows: reduced.map(|r| merged_rows(table, r)).unwrap_or_default(),
        initial: reduced.map(|r| TotalStatePart {
            row: r.table.name(r.initial.row),
            column: r.table.column_text(r.initial.column),
        }),
    }
}

/// The squares of the implication table, made one by one while they are written: there can be half a million.
struct Pairs<'a>(&'a Spec, &'a PairTable);

impl Serialize for Pairs<'_> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.collect_seq(self.1.iter().map(|p| pair(self.0, &p)))
    }
}

fn pair<'a>(spec: &'a Spec, pair: &Pair) -> PairPart<'a> {
    let name = |row: Row| spec.table.name(row);
    let implies: Vec<[&str; 2]> = pair.implies.iter().map(|((a, b), _)| [name(*a), name(*b)]).collect();
    let part = PairPart {
        rows: [name(pair.a), name(pair.b)],
        verdict: "compatible",
        implies: Some(implies),
        conflict: None,
        struck_by: None,
        pass: None,
    };
    match pair.verdict {
        Verdict::Compatible => part,
        Verdict::Conflict(conflict) => PairPart {
            verdict: "conflict",
            implies: None,
            conflict: Some(ConflictPart {
                column: conflict.column.map(|c| spec.table.column_text(c)),
                output: spec.signals.outputs.get(conflict.output).map_or("", String::as_str),
            }),
            ..part
        },
        Verdict::Struck { by: (a, b), pass } => {
            PairPart { verdict: "struck", struck_by: Some([name(a), name(b)]), pass: Some(pass), ..part }
        }
    }
}

fn names_of<'a>(table: &'a FlowTable, set: &RowSet) -> Vec<&'a str> {
    set.ones().map(|i| table.name(Row::new(i))).collect()
}

fn merged_rows<'a>(primitive: &'a FlowTable, reduced: &'a Reduced) -> Vec<RowPart<'a>> {
    let table = &reduced.table;
    let columns = columns_by_text(table);
    let cells = |row: Row| {
        let specified = columns.iter().map(|(c, text)| (table.cell(row, *c), text));
        Map(specified
            .filter(|(cell, _)| cell.next.is_some() || cell.outputs.care != 0)
            .map(|(cell, text)| {
                let next = cell.next.map_or("-", |n| table.name(n));
                (text.clone(), CellPart { next, outputs: cell.outputs.text(table.outputs) })
            })
            .collect())
    };
    table
        .rows()
        .map(|row| RowPart {
            name: table.name(row),
            members: reduced.members[row.at()].iter().map(|&m| primitive.name(m)).collect(),
            cells: cells(row),
        })
        .collect()
}

/// All columns with their texts, in the order of the texts.
fn columns_by_text(table: &FlowTable) -> Vec<(Column, String)> {
    let mut columns: Vec<(Column, String)> = table.columns().map(|c| (c, table.column_text(c))).collect();
    columns.sort_by(|a, b| a.1.cmp(&b.1));
    columns
}

#[derive(Serialize)]
struct CodesPart<'a> {
    method: &'static str,
    bits: Vec<String>,
    codes: Map<Vec<String>>,
    spare: Map<String>,
    proved: bool,
    moves: Vec<MovePart<'a>>,
    critical_races: Option<Vec<RacePart<'a>>>,
    noncritical_races: Option<usize>,
    longest_path: usize,
    initial: String,
}

#[derive(Serialize)]
struct MovePart<'a> {
    from: &'a str,
    column: String,
    to: &'a str,
    path: Vec<String>,
}

#[derive(Serialize)]
struct RacePart<'a> {
    from: &'a str,
    column: String,
    to: &'a str,
    kind: &'static str,
    path: Vec<String>,
}

fn codes<'a>(reduced: &'a Reduced, coded: &'a Coded, races: Option<&'a Races>) -> CodesPart<'a> {
    let table = &reduced.table;
    let text = |code: &Code| code.text(coded.bits);
    let texts = |codes: &[Code]| codes.iter().map(text).collect::<Vec<_>>();
    CodesPart {
        method: coded.method.word(),
        bits: state_variables(coded.bits),
        codes: Map(table.names.iter().cloned().zip(coded.codes.iter().map(|c| texts(c))).collect()),
        spare: Map(coded.spare.iter().map(|s| (s.name.clone(), text(&s.code))).collect()),
        proved: coded.bound.proved(),
        moves: coded
            .ways
            .iter()
            .map(|w| MovePart {
                from: table.name(w.from),
                column: table.column_text(w.column),
                to: table.name(w.to),
                path: texts(&w.path),
            })
            .collect(),
        critical_races: races.map(|races| {
            let critical = races.critical.iter();
            critical
                .map(|r| RacePart {
                    from: table.name(r.from),
                    column: table.column_text(r.column),
                    to: table.name(r.to),
                    kind: race_word(r.kind),
                    path: texts(&r.path),
                })
                .collect()
        }),
        noncritical_races: races.map(|r| r.noncritical),
        longest_path: coded.longest_path,
        initial: text(&coded.initial),
    }
}

fn race_word(kind: RaceKind) -> &'static str {
    match kind {
        RaceKind::Critical => "critical",
        RaceKind::Oscillation => "oscillation",
        RaceKind::Stray => "stray",
    }
}

fn state_variables(bits: usize) -> Vec<String> {
    (1..=bits).map(|i| format!("y{i}")).collect()
}

#[derive(Serialize)]
struct EquationsPart<'a> {
    form: &'static str,
    shape: &'static str,
    variables: &'a [String],
    functions: Vec<FunctionPart<'a>>,
    essential_hazards: Vec<HazardPlacePart<'a>>,
    burst_essential_hazards: Vec<HazardPlacePart<'a>>,
    implementation_hazards: Vec<HazardPlacePart<'a>>,
    clashes: Vec<ClashPart<'a>>,
}

#[derive(Serialize)]
struct FunctionPart<'a> {
    name: &'a str,
    products: Vec<String>,
    literals: usize,
    proved: bool,
    /// One entry for each product: why it is there.
    reasons: Vec<ReasonPart>,
}

#[derive(Serialize)]
struct ReasonPart {
    hazard_only: bool,
    texts: Vec<String>,
}

#[derive(Serialize)]
struct HazardPlacePart<'a> {
    row: &'a str,
    column: String,
    /// The input that changes, where it is one alone.
    #[serde(skip_serializing_if = "Option::is_none")]
    input: Option<&'a str>,
    to: String,
    /// The column that the far end may still see.
    seen: String,
}

#[derive(Serialize)]
struct ClashPart<'a> {
    function: &'a str,
    transitions: &'a [String],
    text: &'a str,
}

fn equation_part<'a>(reduced: &'a Reduced, equations: &'a Equations) -> EquationsPart<'a> {
    let width = equations.variables.len();
    let places =
        |hazards: &[EssentialHazard]| hazards.iter().map(|h| hazard(reduced, equations, h)).collect();
    EquationsPart {
        form: equations.form.word(),
        shape: equations.shape.word(),
        variables: &equations.variables,
        functions: equations
            .functions
            .iter()
            .map(|f| FunctionPart {
                name: &f.name,
                products: f.products.iter().map(|p| p.cube.text(width)).collect(),
                literals: f.literals(),
                proved: f.bound.proved(),
                reasons: f
                    .products
                    .iter()
                    .map(|p| ReasonPart {
                        hazard_only: p.hazard_only,
                        texts: reasons(equations, reduced, f, p).iter().map(Reason::text).collect(),
                    })
                    .collect(),
            })
            .collect(),
        essential_hazards: places(&equations.essential),
        burst_essential_hazards: places(&equations.burst_essential),
        implementation_hazards: places(&equations.implementation),
        clashes: equations
            .clashes
            .iter()
            .map(|c| ClashPart { function: &c.function, transitions: &c.transitions, text: &c.text })
            .collect(),
    }
}

fn hazard<'a>(
    reduced: &'a Reduced,
    equations: &'a Equations,
    hazard: &EssentialHazard,
) -> HazardPlacePart<'a> {
    let table = &reduced.table;
    let changed = hazard.column.0 ^ hazard.to.0;
    HazardPlacePart {
        row: table.name(hazard.row),
        column: table.column_text(hazard.column),
        input: (changed.count_ones() == 1)
            .then(|| equations.variables[changed.trailing_zeros() as usize].as_str()),
        to: table.column_text(hazard.to),
        seen: table.column_text(hazard.seen),
    }
}

#[derive(Serialize)]
struct ProofPart<'a> {
    conforms: bool,
    moves_checked: usize,
    hazards: Vec<GlitchPart<'a>>,
    needs_slow_feedback: Vec<String>,
    power_up_traps: Vec<TrapPart>,
    power_up_states: usize,
    power_up_exact: bool,
    mismatches: Vec<MismatchPart<'a>>,
    /// What was found beyond the lists.
    more_hazards: usize,
    more_power_up_traps: usize,
    more_mismatches: usize,
}

#[derive(Serialize)]
struct GlitchPart<'a> {
    function: &'a str,
    row: &'a str,
    from: &'a str,
    to: &'a str,
    kind: &'a str,
    text: &'a str,
}

#[derive(Serialize)]
struct TrapPart {
    code: String,
    column: String,
    oscillates: bool,
    codes: Vec<String>,
}

#[derive(Serialize)]
struct MismatchPart<'a> {
    stage: &'a str,
    text: &'a str,
}

fn proof<'a>(reduced: &'a Reduced, coded: &Coded, proof: &'a Proof) -> ProofPart<'a> {
    let table = &reduced.table;
    ProofPart {
        conforms: proof.conforms(),
        moves_checked: proof.moves_checked,
        hazards: proof
            .hazards
            .iter()
            .map(|h| GlitchPart {
                function: &h.function,
                row: table.name(h.row),
                from: &h.from,
                to: &h.to,
                kind: h.kind,
                text: &h.text,
            })
            .collect(),
        needs_slow_feedback: proof.slow.iter().map(|i| format!("y{}", i + 1)).collect(),
        power_up_traps: proof
            .traps
            .iter()
            .map(|t| TrapPart {
                code: t.code.text(coded.bits),
                column: table.column_text(t.column),
                oscillates: t.oscillates,
                codes: t.codes.iter().map(|c| c.text(coded.bits)).collect(),
            })
            .collect(),
        power_up_states: proof.power_up_states,
        power_up_exact: proof.power_up_exact,
        mismatches: proof.mismatches.iter().map(|m| MismatchPart { stage: m.stage, text: &m.text }).collect(),
        more_hazards: proof.more_hazards,
        more_power_up_traps: proof.more_traps,
        more_mismatches: proof.more_mismatches,
    }
}

#[derive(Serialize)]
struct CostPart {
    literals: usize,
    gates: usize,
    transistors: usize,
    levels: usize,
}

fn cost(cost: &Cost) -> CostPart {
    CostPart {
        literals: cost.literals,
        gates: cost.gates,
        transistors: cost.transistors,
        levels: cost.levels,
    }
}
