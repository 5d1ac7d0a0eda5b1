//! Maximal compatibles against the maximal cliques of two graph libraries: petgraph (crates.io) and networkx (PyPI).
//!
//! The graph is drawn from the definition of compatibility by brute force, so that the implication table is checked too.

mod common;

use std::collections::BTreeSet;

use petgraph::algo::maximal_cliques;
use petgraph::graph::{NodeIndex, UnGraph};
use serde_json::json;
use stillgate::base::Row;
use stillgate::project::Project;

use common::random::{UNROLLED, primitive, shape_of, unrolled};
use common::{derive, naive};

/// Compatible rows, the maximal compatibles of the program, and those of petgraph, as sorted lists.
struct Case {
    rows: usize,
    edges: Vec<(usize, usize)>,
    ours: Vec<Vec<usize>>,
    petgraph: Vec<Vec<usize>>,
}

fn case(project: &Project) -> Option<Case> {
    let design = derive(project);
    let (spec, merged) = (design.spec?, design.merged?);
    let apart = naive::incompatible(&spec.table);
    let rows = apart.len();
    let edges: Vec<(usize, usize)> =
        (0..rows).flat_map(|b| (0..b).map(move |a| (a, b))).filter(|&(a, b)| !apart[a][b]).collect();
    for (a, row) in apart.iter().enumerate() {
        for (b, &apart) in row.iter().enumerate().take(a) {
            assert_eq!(merged.pairs.compatible(Row::new(a), Row::new(b)), !apart, "rows {a} and {b}");
        }
    }
    let mut graph = UnGraph::<(), ()>::default();
    let nodes: Vec<NodeIndex> = (0..rows).map(|_| graph.add_node(())).collect();
    for &(a, b) in &edges {
        graph.add_edge(nodes[a], nodes[b], ());
    }
    let petgraph: BTreeSet<Vec<usize>> = maximal_cliques(&graph)
        .into_iter()
        .map(|clique| {
            let mut rows: Vec<usize> = clique.into_iter().map(NodeIndex::index).collect();
            rows.sort_unstable();
            rows
        })
        .collect();
    let mut ours: Vec<Vec<usize>> = merged.maximal.iter().map(|set| set.ones().collect()).collect();
    assert!(merged.maximal_complete);
    let unsorted = ours.clone();
    ours.sort();
    assert_eq!(ours, unsorted, "the maximal compatibles stand in order");
    Some(Case { rows, edges, ours, petgraph: petgraph.into_iter().collect() })
}

#[test]
fn maximal_compatibles_are_the_maximal_cliques() {
    let small = (0..300).map(|seed| primitive(seed, shape_of(seed)));
    let large = (0..20).map(|seed| unrolled(seed, UNROLLED));
    let cases: Vec<Case> = small.chain(large).filter_map(|project| case(&project)).collect();
    assert!(cases.len() > 200, "only {} tables could be merged", cases.len());
    for case in &cases {
        assert_eq!(case.ours, case.petgraph);
    }
    let asked: Vec<_> = cases.iter().map(|c| json!({"nodes": c.rows, "edges": c.edges})).collect();
    let networkx = common::python::ask("cliques.py", &json!(asked));
    let ours: Vec<_> = cases.iter().map(|c| &c.ours).collect();
    assert_eq!(networkx, json!(ours));
}
