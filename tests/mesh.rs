//! Meshes of random ducts and inserts: sound, conforming, proved valid, of the right area, the same every time.

mod common;

use flumeloft::base::{Vec2, Watch, vec2};
use flumeloft::geometry::duct::{Role, Template};
use flumeloft::geometry::{
    BoundaryTag, ClosedSpline, Domain, DomainInsert, Outline, OutlinePiece, Segment, check,
};
use flumeloft::mesh::reference::Reference;
use flumeloft::mesh::{CurvedMesh, Fineness, Locator, MeshError, MeshSettings, Motion, generate};
use proptest::prelude::*;
use std::collections::BTreeMap;

fn outline(template: Template, height: f64) -> Outline {
    let pieces = template.pieces(height);
    let from = |i: usize| pieces[(i + pieces.len() - 1) % pieces.len()].to;
    Outline {
        pieces: (0..pieces.len())
            .map(|i| OutlinePiece {
                name: pieces[i].name.into(),
                segment: Segment::new(&pieces[i].shape, from(i), pieces[i].to),
                is_port: matches!(pieces[i].role, Role::Inlet | Role::Outlet),
            })
            .collect(),
    }
}

/// A pebble: an ellipse with two waves on it.
fn pebble(
    centre: Vec2,
    size: f64,
    aspect: f64,
    turn: f64,
    waves: [f64; 2],
    solid: bool,
) -> DomainInsert {
    const POINTS: usize = 18;
    let controls = (0..POINTS)
        .map(|i| {
            let a = 2.0 * std::f64::consts::PI * i as f64 / POINTS as f64;
            let r = size * (1.0 + waves[0] * (2.0 * a).cos() + waves[1] * (3.0 * a + 1.0).sin());
            centre + vec2(r * a.cos(), aspect * r * a.sin()).rotated(turn)
        })
        .collect();
    DomainInsert {
        name: format!("{centre:?}"),
        contour: ClosedSpline::new(controls),
        solid,
        cell_size_m: None,
    }
}

/// Area by quadrature of the map's determinant (the trapezoid-free Gauss rule of the tables is not needed: the
/// determinant is a polynomial, integrated exactly through its nodal values).
fn area(mesh: &CurvedMesh) -> f64 {
    let rule = flumeloft::fem::quadrature::triangle(2 * mesh.order);
    let basis = Reference::new(mesh.order);
    let mut sum = 0.0;
    for t in 0..mesh.mesh.triangles.len() {
        for &(at, w) in &rule {
            let mut f = [0.0; 4];
            for (g, &n) in basis.gradients(at).iter().zip(mesh.element(t)) {
                let p = mesh.nodes[n as usize];
                f[0] += p.x * g[0];
                f[1] += p.x * g[1];
                f[2] += p.y * g[0];
                f[3] += p.y * g[1];
            }
            sum += w * (f[0] * f[3] - f[1] * f[2]);
        }
    }
    sum
}

fn exact_area(domain: &Domain) -> f64 {
    let holes: f64 = domain
        .inserts
        .iter()
        .filter(|i| !i.solid)
        .map(|i| i.contour.area())
        .sum();
    domain.outline.area() - holes
}

/// Every invariant of a mesh.
fn audit(mesh: &CurvedMesh, domain: &Domain) -> Result<(), String> {
    if let Some(t) = mesh.first_invalid() {
        return Err(format!("cell {t} is not proved valid"));
    }
    let m = &mesh.mesh;
    let mut sides: BTreeMap<u32, usize> = BTreeMap::new();
    for (t, edges) in m.triangle_edges.iter().enumerate() {
        let [a, b, c] = m.triangles[t].map(|v| m.points[v as usize]);
        if (b - a).cross(c - a) <= 0.0 {
            return Err(format!("triangle {t} is clockwise"));
        }
        for (e, &edge) in edges.iter().enumerate() {
            let (p, q) = (m.triangles[t][e], m.triangles[t][(e + 1) % 3]);
            if m.edges[edge as usize] != [p.min(q), p.max(q)] {
                return Err(format!("triangle {t} has a wrong edge"));
            }
            *sides.entry(edge).or_default() += 1;
        }
    }
    if sides.values().any(|&n| n > 2) || sides.len() != m.edges.len() {
        return Err("edges are not shared by one or two triangles".into());
    }
    let holes = domain.inserts.iter().filter(|i| !i.solid).count() as i64;
    let euler = m.points.len() as i64 - m.edges.len() as i64 + m.triangles.len() as i64;
    if euler != 1 - holes {
        return Err(format!("Euler number {euler} with {holes} holes"));
    }
    let mut covered: BTreeMap<BoundaryTag, f64> = BTreeMap::new();
    for b in &m.boundary {
        *covered.entry(b.tag).or_default() += (b.t[1] - b.t[0]).abs();
    }
    let curves = domain.outline.pieces.len() + domain.inserts.len();
    if covered.len() != curves || covered.values().any(|c| (c - 1.0).abs() > 1e-9) {
        return Err(format!("curves are covered {covered:?}"));
    }
    for n in mesh.boundary_nodes.iter() {
        let off = domain
            .point(n.tag, n.t)
            .distance(mesh.nodes[n.node as usize]);
        if off > 1e-12 {
            return Err(format!("a node lies {off} off its curve"));
        }
    }
    let off = area(mesh) / exact_area(domain) - 1.0;
    // Curved cells of order k miss the area by O(h^2k); the coarsest here by far less than this.
    let band = if mesh.order == 2 { 1e-4 } else { 2e-5 };
    if off.abs() > band {
        return Err(format!("area off by {off:.1e} at order {}", mesh.order));
    }
    Ok(())
}

proptest! {
    // The same sixty domains each time, so that a run tells of a change and not of luck; six hundred others passed
    // when this was written (raise the number and drop the seed to look for more).
    #![proptest_config(ProptestConfig {
        cases: 60,
        failure_persistence: None,
        rng_seed: proptest::test_runner::RngSeed::Fixed(20_261_201),
        ..ProptestConfig::default()
    })]
    #[test]
    fn meshes_of_random_domains_are_sound(
        kind in 0usize..5,
        order in 2usize..=5,
        shapes in proptest::collection::vec(
            (0.0..1.0f64, 0.0..1.0f64, 0.05..0.3f64, 0.3..1.0f64, 0.0..3.1f64, -0.15..0.15f64, -0.1..0.1f64, any::<bool>()),
            1..4,
        ),
    ) {
        let template = Template::all()[kind];
        let outline = outline(template, 1.0);
        let corners: Vec<Vec2> = outline.pieces.iter().map(|p| flumeloft::geometry::Curve::point(&p.segment, 0.0)).collect();
        let low = corners.iter().fold(corners[0], |l, p| vec2(l.x.min(p.x), l.y.min(p.y)));
        let high = corners.iter().fold(corners[0], |l, p| vec2(l.x.max(p.x), l.y.max(p.y)));
        let mut domain = Domain { outline, inserts: vec![] };
        for (x, y, size, aspect, turn, a, b, solid) in shapes {
            let centre = vec2(low.x + x * (high.x - low.x), low.y + y * (high.y - low.y));
            domain.inserts.push(pebble(centre, size, aspect, turn, [a, b], solid));
            if !check(&domain).is_empty() {
                domain.inserts.pop();
            }
        }
        let settings = MeshSettings::preset(Fineness::Draft, order);
        match generate(&domain, &settings, &Watch::idle()) {
            Ok(mesh) => {
                prop_assert_eq!(audit(&mesh, &domain), Ok(()));
                let again = generate(&domain, &settings, &Watch::idle()).unwrap();
                prop_assert!(mesh.nodes == again.nodes, "two runs differ");
            }
            // A gap just above touching may need more cells than allowed: told, not meshed.
            Err(MeshError::Budget { .. }) => {}
            Err(error) => prop_assert!(false, "{}", error),
        }
    }
}

fn one_circle(order: usize, fineness: f64) -> (CurvedMesh, Domain) {
    let domain = Domain {
        outline: common::rectangle(3.0, 1.0),
        inserts: vec![common::circle(vec2(1.0, 0.47), 0.2, 48)],
    };
    let mut settings = MeshSettings::preset(Fineness::Draft, order);
    settings.turn_rad = 3.0;
    settings.cells_around = 9.0 * fineness;
    settings.cells_across = 1.5 * fineness;
    settings.cells_in_gap = 0.5;
    settings.growth = 0.3;
    (
        generate(&domain, &settings, &Watch::idle()).unwrap(),
        domain,
    )
}

/// Area of cells curved to order k by nodes above the chords' Lobatto points: the error falls with h^2k.
#[test]
fn area_converges_at_its_order() {
    for order in 2..=4 {
        let error = |f: f64| {
            let (mesh, domain) = one_circle(order, f);
            (area(&mesh) / exact_area(&domain) - 1.0).abs()
        };
        let (coarse, fine) = (error(1.0), error(3.0));
        let observed = (coarse / fine).ln() / 3f64.ln();
        println!("order {order}: area off {coarse:.1e} -> {fine:.1e}, observed {observed:.2}");
        assert!(
            observed > order as f64 + 0.5 || fine < 1e-11,
            "order {order}: {observed}"
        );
    }
    // The flawed twin: chords in place of curves are of second order only and far off.
    let (mesh, domain) = one_circle(4, 2.0);
    let chords = CurvedMesh::new(mesh.mesh.clone(), &domain, 1);
    assert!((area(&chords) / exact_area(&domain) - 1.0).abs() > 1e-4);
}

#[test]
fn motion_is_linear_and_has_its_transpose() {
    let (mesh, _) = one_circle(4, 2.0);
    let motion = Motion::new(&mesh).unwrap();
    let nodes: Vec<_> = flumeloft::mesh::motion::insert_nodes(&mesh)
        .copied()
        .collect();
    let wave = |k: f64| {
        nodes
            .iter()
            .map(|n| vec2((k * n.t * 6.0).sin(), (k * n.t * 5.0 + 1.0).cos()) * 0.01)
            .collect::<Vec<_>>()
    };
    let (a, b) = (wave(1.0), wave(2.3));
    let sum: Vec<Vec2> = a.iter().zip(&b).map(|(&p, &q)| p * 2.0 - q).collect();
    let (ma, mb, ms) = (motion.extend(&a), motion.extend(&b), motion.extend(&sum));
    for i in 0..ms.len() {
        assert!(ms[i].distance(ma[i] * 2.0 - mb[i]) < 1e-13);
    }
    for n in mesh.boundary_nodes.iter() {
        if matches!(n.tag, BoundaryTag::Piece(_)) {
            assert_eq!(ma[n.node as usize], Vec2::ZERO);
        }
    }
    let gradient: Vec<Vec2> = (0..ma.len())
        .map(|i| vec2((i as f64).sin(), (1.7 * i as f64).cos()))
        .collect();
    let forward: f64 = ma.iter().zip(&gradient).map(|(d, g)| d.dot(*g)).sum();
    let backward: f64 = a
        .iter()
        .zip(motion.restrict(&gradient))
        .map(|(d, g)| d.dot(g))
        .sum();
    assert!(
        (forward - backward).abs() < 1e-12 * forward.abs().max(1.0),
        "{forward} {backward}"
    );
    assert!(
        (forward - 1.001 * backward).abs() > 1e-6,
        "the check must see a transpose off by a thousandth"
    );
    // A tenth of the insert's size sideways: the cells follow.
    let shift = motion.extend(&vec![vec2(0.03, 0.02); nodes.len()]);
    assert_eq!(mesh.moved(&shift).first_invalid(), None);
}

#[test]
fn places_are_found_again() {
    let (mesh, _) = one_circle(4, 1.0);
    let locator = Locator::new(&mesh);
    let basis = Reference::new(4);
    for t in 0..mesh.mesh.triangles.len() {
        for at in [[0.2, 0.3], [0.6, 0.1], [0.05, 0.9]] {
            let values = basis.values(at);
            let place = mesh
                .element(t)
                .iter()
                .zip(&values)
                .fold(Vec2::ZERO, |s, (&n, &v)| s + mesh.nodes[n as usize] * v);
            let (found, back) = locator.find(place).unwrap();
            assert_eq!(found, t);
            assert!((back[0] - at[0]).abs() + (back[1] - at[1]).abs() < 1e-9);
        }
    }
    assert!(locator.find(vec2(1.0, 0.47)).is_none() && locator.find(vec2(9.0, 0.0)).is_none());
}

#[test]
fn too_many_cells_are_refused_before_any_work() {
    let (_, domain) = one_circle(2, 1.0);
    let mut settings = MeshSettings::preset(Fineness::Final, 2);
    settings.most_triangles = 100;
    assert!(matches!(
        generate(&domain, &settings, &Watch::idle()),
        Err(MeshError::Budget { .. })
    ));
}

#[test]
fn crossing_curves_are_an_error_not_a_panic() {
    let mut domain = one_circle(2, 1.0).1;
    domain.inserts.push(common::circle(vec2(1.2, 0.5), 0.2, 24));
    let result = generate(
        &domain,
        &MeshSettings::preset(Fineness::Draft, 3),
        &Watch::idle(),
    );
    assert!(result.is_err());
}
