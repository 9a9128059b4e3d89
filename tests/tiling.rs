//! Patches of tilings against published counts and lengths.

use lierne::tiling::geometry::{Lengths, frames, tile_vertices};
use lierne::tiling::{Centre, Growth, Patch, Rule, Tiling, TilingError, grow};

const LIMIT: u64 = 1_000_000;

fn patch(p: u64, q: u64, rings: u32, rule: Rule) -> Patch {
    let growth = Growth::regular(Tiling::new(p, q).unwrap(), rings, rule);
    grow(&growth, LIMIT).unwrap()
}

fn legs_by_ring(p: u64, q: u64, rings: u32, rule: Rule) -> Vec<usize> {
    (0..=rings).map(|r| patch(p, q, r, rule).boundary_numbers().len()).collect()
}

/// Edge layers are the coordination sequences of the dual {q,p}: OEIS A054888, A001354,
/// A054889, A377322, A054890; the others were counted independently.
#[test]
fn edge_layers_have_the_published_sizes() {
    let table: [(u64, u64, &[usize]); 11] = [
        (5, 4, &[1, 5, 15, 40, 105, 275, 720, 1885]),
        (7, 3, &[1, 7, 21, 56, 147, 385, 1008, 2639]),
        (5, 5, &[1, 5, 20, 70, 245, 860, 3015]),
        (4, 5, &[1, 4, 12, 28, 64, 148, 340, 780, 1792]),
        (7, 6, &[1, 7, 42, 245, 1428, 8323]),
        (6, 4, &[1, 6, 24, 90, 336, 1254]),
        (8, 3, &[1, 8, 32, 120, 448, 1672]),
        (3, 7, &[1, 3, 6, 12, 18, 30, 45]),
        (3, 8, &[1, 3, 6, 12, 21, 36]),
        (4, 6, &[1, 4, 12, 32, 84, 220]),
        (6, 5, &[1, 6, 30, 138, 636, 2934]),
    ];
    for (p, q, sizes) in table {
        let rings = sizes.len() as u32 - 1;
        assert_eq!(patch(p, q, rings, Rule::Edge).ring_sizes(), sizes, "{{{p},{q}}}");
    }
}

/// Counted independently of this project.
#[test]
fn edge_layers_leave_the_known_boundary() {
    let table: [(u64, u64, &[usize]); 7] = [
        (5, 4, &[5, 20, 55, 145, 380, 995, 2605]),
        (4, 5, &[4, 12, 28, 68, 156, 356, 820]),
        (7, 3, &[7, 28, 77, 203, 532, 1393]),
        (3, 7, &[3, 6, 12, 18, 30, 48, 75]),
        (6, 4, &[6, 30, 114, 426, 1590]),
        (5, 5, &[5, 20, 70, 250, 875]),
        (8, 3, &[8, 40, 152, 568]),
    ];
    for (p, q, legs) in table {
        assert_eq!(legs_by_ring(p, q, legs.len() as u32 - 1, Rule::Edge), legs, "{{{p},{q}}}");
    }
}

/// {4,5}: the boundary row is the table of arXiv:2601.04467; the others were counted
/// independently.
#[test]
fn vertex_inflation_has_the_known_layers_and_boundary() {
    let table: [(u64, u64, &[usize], &[usize]); 8] = [
        (4, 5, &[1, 12, 48, 180, 672], &[4, 20, 76, 284, 1060]),
        (3, 7, &[1, 15, 45, 120, 315], &[3, 12, 33, 87, 228]),
        (3, 8, &[1, 18, 72, 270, 1008], &[3, 15, 57, 213, 795]),
        (5, 5, &[1, 15, 105, 720], &[5, 40, 275, 1885]),
        (4, 6, &[1, 16, 96, 560], &[4, 28, 164, 956]),
        (6, 5, &[1, 18, 180, 1782], &[6, 66, 654, 6474]),
        (5, 4, &[1, 10, 40, 150, 560], &[5, 25, 95, 355, 1325]),
        (6, 4, &[1, 12, 72, 420], &[6, 42, 246, 1434]),
    ];
    for (p, q, sizes, legs) in table {
        let rings = sizes.len() as u32 - 1;
        assert_eq!(patch(p, q, rings, Rule::Vertex).ring_sizes(), sizes, "{{{p},{q}}}");
        assert_eq!(legs_by_ring(p, q, rings, Rule::Vertex), legs, "{{{p},{q}}}");
    }
}

/// Where three tiles meet at a vertex, sharing a vertex is sharing an edge.
#[test]
fn both_rules_agree_where_three_tiles_meet() {
    for p in [7, 8, 9, 12] {
        let (a, b) = (patch(p, 3, 4, Rule::Edge), patch(p, 3, 4, Rule::Vertex));
        assert_eq!(a.ring_sizes(), b.ring_sizes(), "{{{p},3}}");
        assert_eq!(a.boundary().len(), b.boundary().len(), "{{{p},3}}");
    }
}

/// λ + 1/λ = (p−2)(q−2) − 2 (from memory, confirmed by counting).
#[test]
fn vertex_inflation_grows_at_the_closed_rate() {
    let known = [
        (5, 4, 3.732051),
        (4, 5, 3.732051),
        (7, 3, 2.618034),
        (6, 4, 5.828427),
        (5, 5, 6.854102),
        (6, 5, 9.898979),
    ];
    for (p, q, rate) in known {
        let tiling = Tiling::new(p, q).unwrap();
        assert!((tiling.growth_rate() - rate).abs() < 1e-6, "{tiling}");
        let rings = if rate > 5.0 { 5 } else { 8 };
        let sizes = patch(p, q, rings, Rule::Vertex).ring_sizes();
        let ratio = sizes[rings as usize] as f64 / sizes[rings as usize - 1] as f64;
        assert!((ratio / rate - 1.0).abs() < 2e-3, "{tiling}: {ratio} against {rate}");
    }
}

/// Pentagons and hexagons by turns, and hexagons round one pentagon: the legs of the codes of
/// JHEP 06 (2015) 149, counted independently.
#[test]
fn rings_of_several_polygons_have_the_known_boundary() {
    let legs = |polygons: &[u32], keep_last: bool, rings: u32| -> Vec<usize> {
        (0..=rings)
            .map(|rings| {
                let growth = Growth {
                    polygons: polygons.to_vec(),
                    keep_last,
                    around: 4,
                    rings,
                    centre: Centre::Tile,
                    rule: Rule::Edge,
                };
                grow(&growth, LIMIT).unwrap().boundary_numbers().len()
            })
            .collect()
    };
    assert_eq!(legs(&[5, 6], false, 8), [5, 25, 75, 255, 745, 2525, 7375, 24995, 73005]);
    assert_eq!(legs(&[5, 6], true, 6), [5, 25, 95, 355, 1325, 4945, 18455]);
}

/// The nine-digit table; r, R and arcs after Canad. Math. Bull. 40, 158 (1997).
#[test]
fn lengths_match_the_table() {
    let root2 = 2f64.sqrt();
    let table = [
        (
            5,
            4,
            [
                1.061275062,
                0.626869663,
                0.842482081,
                0.397975427,
                0.303558659,
                1.495348781,
                1.798907440,
            ],
        ),
        (
            4,
            5,
            [
                1.253739326,
                0.530637531,
                0.842482081,
                0.397975427,
                0.259263587,
                1.798907440,
                2.058171027,
            ],
        ),
        (
            7,
            3,
            [
                0.566256307,
                0.545274832,
                0.620671738,
                0.300742619,
                0.266077245,
                1.746114927,
                2.012192173,
            ],
        ),
        (
            3,
            7,
            [
                1.090549664,
                0.283128153,
                0.620671738,
                0.300742619,
                0.140625930,
                3.485219078,
                3.625845008,
            ],
        ),
        (6, 4, [1.316957897, 0.881373587, 1.146215835, 0.517638090, root2 - 1.0, 1.0, root2]),
        (
            4,
            6,
            [1.762747174, 0.658478948, 1.146215835, 0.517638090, 0.317837245, root2, 3f64.sqrt()],
        ),
        (
            5,
            5,
            [
                1.684964163,
                0.842482081,
                1.253739326,
                0.555892970,
                0.397975427,
                1.057371263,
                1.455346690,
            ],
        ),
    ];
    for (p, q, known) in table {
        let l = Lengths::of(Tiling::new(p, q).unwrap());
        let found = [
            l.edge,
            l.inradius,
            l.circumradius,
            l.vertex_drawn,
            l.edge_middle_drawn,
            l.arc_radius.unwrap(),
            l.arc_centre.unwrap(),
        ];
        for (k, (a, b)) in found.iter().zip(known).enumerate() {
            assert!((a - b).abs() < 6e-10, "{{{p},{q}}} entry {k}: {a} against {b}");
        }
    }
}

/// The whole sphere has 4q/(4 − (p−2)(q−2)) tiles, whatever the centre and rule.
#[test]
fn spherical_tilings_close_into_the_regular_solids() {
    for (p, q, tiles, edge_rings) in [
        (3, 3, 4, vec![1, 3]),
        (4, 3, 6, vec![1, 4, 1]),
        (3, 4, 8, vec![1, 3, 3, 1]),
        (5, 3, 12, vec![1, 5, 5, 1]),
        (3, 5, 20, vec![1, 3, 6, 6, 3, 1]),
    ] {
        let tiling = Tiling::new(p, q).unwrap();
        assert_eq!(tiling.sphere(), Some(tiles));
        let rings = edge_rings.len() as u32 - 1;
        let whole = patch(p, q, rings, Rule::Edge);
        assert_eq!(whole.ring_sizes(), edge_rings, "{tiling}");
        for (centre, rule) in [
            (Centre::Tile, Rule::Edge),
            (Centre::Tile, Rule::Vertex),
            (Centre::Vertex, Rule::Edge),
            (Centre::Vertex, Rule::Vertex),
        ] {
            let mut growth = Growth::regular(tiling, 9, rule);
            growth.centre = centre;
            let Err(TilingError::Closed { tiles: t, possible, .. }) = grow(&growth, LIMIT) else {
                panic!("{tiling} must close");
            };
            assert_eq!(t, tiles, "{tiling}");
            growth.rings = possible;
            let solid = grow(&growth, LIMIT).unwrap();
            assert_eq!(solid.boundary_numbers(), &[] as &[u32]);
            let (v, e, f) = solid.euler_counts();
            assert_eq!((v + f - e, f as u32), (2, tiles), "{tiling}");
        }
    }
}

/// Square rings 8r, hexagon rings 6r; triangles by the vertex rule 12, 24, …: counted on paper.
#[test]
fn euclidean_rings_grow_linearly() {
    assert_eq!(patch(4, 4, 4, Rule::Vertex).ring_sizes(), [1, 8, 16, 24, 32]);
    assert_eq!(patch(4, 4, 4, Rule::Edge).ring_sizes(), [1, 4, 8, 12, 16]);
    assert_eq!(patch(6, 3, 4, Rule::Vertex).ring_sizes(), [1, 6, 12, 18, 24]);
    assert_eq!(patch(3, 6, 3, Rule::Vertex).ring_sizes(), [1, 12, 24, 36]);
}

/// From a vertex, ring 0 is the q tiles round it.
#[test]
fn a_vertex_may_be_the_middle() {
    for (p, q) in [(4, 5), (5, 4), (3, 7), (7, 3), (4, 4), (6, 3)] {
        let tiling = Tiling::new(p, q).unwrap();
        let mut growth = Growth::regular(tiling, 2, Rule::Vertex);
        growth.centre = Centre::Vertex;
        let grown = grow(&growth, LIMIT).unwrap();
        let sizes = grown.ring_sizes();
        assert_eq!(sizes[0] as u64, q, "{tiling}");
        assert!(sizes[1..].iter().all(|s| (*s as u64).is_multiple_of(q)), "{tiling}: {sizes:?}");
        let (v, e, f) = grown.euler_counts();
        assert_eq!(v + f - e, 1, "{tiling}");
    }
}

/// Places are computed after the fact, so they are an independent judge of the neighbours:
/// glued sides must come to lie on each other, and tiles must not coincide.
#[test]
fn places_agree_with_neighbours() {
    for (p, q, rings) in [
        (5, 4, 3),
        (4, 5, 3),
        (7, 3, 4),
        (3, 7, 5),
        (6, 4, 2),
        (4, 4, 4),
        (6, 3, 4),
        (3, 6, 4),
        (5, 3, 2),
        (4, 3, 1),
        (3, 5, 3),
    ] {
        for centre in [Centre::Tile, Centre::Vertex] {
            let tiling = Tiling::new(p, q).unwrap();
            let mut growth = Growth::regular(tiling, rings, Rule::Edge);
            growth.centre = centre;
            if tiling.sphere().is_some() && centre == Centre::Vertex {
                growth.rings -= 1;
            }
            let patch = grow(&growth, LIMIT).unwrap();
            let frames = frames(&patch).unwrap();
            let corners: Vec<_> = frames.iter().map(|f| tile_vertices(tiling, f)).collect();
            let p = p as usize;
            for n in 0..patch.sides() {
                let s = patch.side(n);
                if let Some(o) = patch.neighbour(s) {
                    for (mine, theirs) in [
                        (s.side as usize, (o.side as usize + 1) % p),
                        ((s.side as usize + 1) % p, o.side as usize),
                    ] {
                        let a = corners[s.tile as usize][mine];
                        let b = corners[o.tile as usize][theirs];
                        let far = (a[0] - b[0]).hypot(a[1] - b[1]);
                        // A corner at the pole is drawn at infinity.
                        if a[0].hypot(a[1]) < 1e6 {
                            assert!(far < 1e-6, "{tiling} side {s:?} against {o:?}: {a:?} {b:?}");
                        }
                    }
                }
            }
        }
    }
}

#[test]
fn the_boundary_runs_once_round_counter_clockwise() {
    for (p, q, rings) in [(5, 4, 3), (4, 5, 3), (7, 3, 3), (3, 7, 4), (4, 4, 4)] {
        let tiling = Tiling::new(p, q).unwrap();
        let patch = patch(p, q, rings, Rule::Vertex);
        let frames = frames(&patch).unwrap();
        let mut turned = 0.0;
        let middles: Vec<f64> = patch
            .boundary()
            .map(|s| {
                let c = tile_vertices(tiling, &frames[s.tile as usize]);
                let (a, b) = (c[s.side as usize], c[(s.side as usize + 1) % p as usize]);
                (a[1] + b[1]).atan2(a[0] + b[0])
            })
            .collect();
        for k in 0..middles.len() {
            let mut step = middles[(k + 1) % middles.len()] - middles[k];
            if step <= -std::f64::consts::PI {
                step += 2.0 * std::f64::consts::PI;
            }
            assert!(step > 0.0, "{tiling}: site {k} does not lead counter-clockwise");
            turned += step;
        }
        assert!((turned - 2.0 * std::f64::consts::PI).abs() < 1e-9, "{tiling}: {turned}");
    }
}

#[test]
fn too_many_tiles_are_refused_at_once() {
    let tiling = Tiling::new(4, 5).unwrap();
    for rings in [11, 40, 1_000_000_000] {
        let refused = grow(&Growth::regular(tiling, rings, Rule::Vertex), LIMIT);
        assert!(matches!(refused, Err(TilingError::TooManyTiles { .. })), "{rings}: {refused:?}");
    }
    let flat = Tiling::new(4, 4).unwrap();
    let refused = grow(&Growth::regular(flat, 1_000_000_000, Rule::Edge), LIMIT);
    assert!(matches!(refused, Err(TilingError::TooManyTiles { .. })), "{refused:?}");
    assert!(Tiling::new(2, 5).is_err() && Tiling::new(5, 1_000_000_000).is_err());
}

mod properties {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #![proptest_config(ProptestConfig { cases: 200, ..ProptestConfig::default() })]
        /// A patch is a disk: vertices − edges + tiles = 1; its boundary is one cycle that
        /// holds every open side once; gluing is mutual; no inner vertex is over-full.
        #[test]
        fn every_patch_is_a_disk(
            polygons in prop::collection::vec(3u32..9, 1..3),
            around in 3u32..9,
            rings in 0u32..4,
            at_vertex: bool,
            by_edge: bool,
        ) {
            // Polygons by turns close up at an even number of tiles a vertex only.
            let polygons = if around % 2 == 1 || !by_edge || at_vertex { vec![polygons[0]] } else { polygons };
            let growth = Growth {
                polygons,
                keep_last: false,
                around,
                rings,
                centre: if at_vertex { Centre::Vertex } else { Centre::Tile },
                rule: if by_edge { Rule::Edge } else { Rule::Vertex },
            };
            match grow(&growth, 30_000) {
                Err(TilingError::TooManyTiles { .. } | TilingError::Closed { .. }) => {}
                Err(other) => prop_assert!(false, "{}", other),
                Ok(patch) => {
                    let (v, e, f) = patch.euler_counts();
                    let closed = patch.boundary_numbers().is_empty();
                    prop_assert_eq!(v + f - e, if closed { 2 } else { 1 });
                    let mut seen = vec![false; patch.sides()];
                    for &n in patch.boundary_numbers() {
                        prop_assert!(!seen[n as usize]);
                        seen[n as usize] = true;
                    }
                    for (n, seen) in seen.into_iter().enumerate() {
                        match patch.glued(n) {
                            None => prop_assert!(seen),
                            Some(o) => prop_assert!(!seen && o != n && patch.glued(o) == Some(n)),
                        }
                        prop_assert_eq!(patch.number(patch.side(n)), n);
                    }
                }
            }
        }
    }
}
