//! Meshes of random ducts and inserts: sound, conforming, proved valid, of the right area, the same every time.

mod common;

use flumeloft::base::{Vec2, Watch, vec2};
use flumeloft::geometry::duct::{Role, Template};
use flumeloft::geometry::{
    BoundaryTag, ClosedSpline, Domain, DomainInsert, Outline, OutlinePiece, Segment, check,
};
use flumeloft::mesh::reference::Reference;
use flumeloft::mesh::{
    AuditFault, CurvedMesh, Fineness, JacobianProof, Locator, MeshError, MeshSettings, Motion,
    audit, generate,
};
use proptest::prelude::*;
use std::sync::Arc;

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

fn exact_area(domain: &Domain) -> f64 {
    let holes: f64 = domain
        .inserts
        .iter()
        .filter(|i| !i.solid)
        .map(|i| i.contour.area())
        .sum();
    domain.outline.area() - holes
}

/// Curved cells of order k miss the area by O(h^2k); the coarsest here by far less than this.
fn area_band(order: usize) -> f64 {
    if order == 2 { 1e-4 } else { 2e-5 }
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
                prop_assert_eq!(audit(&mesh, &domain, area_band(order)), Ok(()));
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
    circle_of(48, order, fineness)
}

/// A circle of so many control points in a duct.
fn circle_of(controls: usize, order: usize, fineness: f64) -> (CurvedMesh, Domain) {
    let domain = Domain {
        outline: common::rectangle(3.0, 1.0),
        inserts: vec![common::circle(vec2(1.0, 0.47), 0.2, controls)],
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
            (mesh.area() / exact_area(&domain) - 1.0).abs()
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
    assert!((chords.area() / exact_area(&domain) - 1.0).abs() > 1e-4);
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

/// The audit sees each kind of damage: a check that passes everything would be worth nothing.
#[test]
fn the_audit_sees_damage() {
    let (mesh, domain) = one_circle(4, 1.5);
    let band = area_band(4);
    assert_eq!(audit(&mesh, &domain, band), Ok(()));
    let with = |change: &dyn Fn(&mut flumeloft::mesh::TriMesh)| {
        let mut topology = (*mesh.mesh).clone();
        change(&mut topology);
        let damaged = CurvedMesh {
            mesh: Arc::new(topology),
            ..mesh.clone()
        };
        audit(&damaged, &domain, band)
    };
    assert!(matches!(
        with(&|m| m.triangles[3].swap(0, 1)),
        Err(AuditFault::Clockwise { triangle: 3, .. })
    ));
    assert!(matches!(
        with(&|m| m.triangle_edges[5].swap(0, 1)),
        Err(AuditFault::WrongEdge { triangle: 5, .. })
    ));
    assert!(matches!(
        with(&|m| {
            m.boundary.pop();
        }),
        Err(AuditFault::NotConforming { triangles: 1, .. })
    ));
    assert!(matches!(
        with(&|m| m.boundary[0].local_edge = (m.boundary[0].local_edge + 1) % 3),
        Err(AuditFault::WrongSide { boundary: 0 })
    ));
    assert!(matches!(
        with(&|m| m.boundary[2].t[1] += 0.01),
        Err(AuditFault::Cover { .. })
    ));
    assert!(matches!(
        with(&|m| m.points.push(Vec2::ZERO)),
        Err(AuditFault::Euler { .. })
    ));
    let moved = |node: usize, by: Vec2| {
        let mut displacement = vec![Vec2::ZERO; mesh.nodes.len()];
        displacement[node] = by;
        audit(&mesh.moved(&displacement), &domain, band)
    };
    // An inner node of the first cell on the insert, thrown across the cell; a node pushed along its wall's normal.
    let beside = mesh
        .mesh
        .boundary
        .iter()
        .find(|b| matches!(b.tag, BoundaryTag::Insert(_)))
        .unwrap();
    let inner = *mesh.element(beside.triangle as usize).last().unwrap() as usize;
    assert!(matches!(
        moved(inner, vec2(0.3, 0.3)),
        Err(AuditFault::Inverted { .. })
    ));
    let on_curve = mesh.boundary_nodes.last().unwrap().node as usize;
    assert!(matches!(
        moved(on_curve, vec2(1e-9, 1e-9)),
        Err(AuditFault::OffCurve { .. })
    ));
    assert!(matches!(
        audit(&mesh, &domain, 1e-14),
        Err(AuditFault::Area { .. })
    ));
}

/// The bounds enclose the determinant at every point looked at, and are sharp for straight cells.
#[test]
fn jacobian_bounds_enclose_the_determinant() {
    for order in 2..=5 {
        let (mesh, _) = one_circle(order, 1.0);
        let (basis, proof) = (Reference::new(order), JacobianProof::new(order));
        let mut curved = 0;
        for t in 0..mesh.mesh.triangles.len() {
            let [least, most] = mesh.jacobian_bounds(t, &proof);
            assert!(least > 0.0);
            curved += usize::from(least < 0.95 * most);
            for i in 0..=12 {
                for j in 0..=12 - i {
                    let at = [i as f64 / 12.0, j as f64 / 12.0];
                    let mut f = [0.0; 4];
                    for (g, &n) in basis.gradients(at).iter().zip(mesh.element(t)) {
                        let p = mesh.nodes[n as usize];
                        f[0] += p.x * g[0];
                        f[1] += p.x * g[1];
                        f[2] += p.y * g[0];
                        f[3] += p.y * g[1];
                    }
                    let det = f[0] * f[3] - f[1] * f[2];
                    assert!(det >= least - 1e-9 * most && det <= most + 1e-9 * most);
                }
            }
        }
        // The flawed twin: bounds that take every cell for straight (least = greatest) would fail above.
        assert!(
            curved > 0,
            "order {order}: no cell is curved enough to tell"
        );
    }
}

/// Interpolation at the mesh's nodes in the cells curved along the circle: the error of a smooth function falls with
/// h^(k + 1). The flawed twin bends the edges but leaves the cells' inner nodes straight: its maps are not smooth, and
/// the order is lost from order 3 on (Lenoir, SIAM J. Numer. Anal. 23, 562, 1986).
#[test]
fn interpolation_keeps_its_order_on_curved_cells() {
    let f = |p: Vec2| (3.0 * p.x + 0.4).sin() * (2.0 * p.y).exp();
    let on_circle = |b: &&flumeloft::mesh::BoundaryEdge| matches!(b.tag, BoundaryTag::Insert(_));
    // Root mean square error over the curved cells, and the cells around the circle.
    let error = |mesh: &CurvedMesh| {
        let basis = Reference::new(mesh.order);
        let rule = flumeloft::fem::quadrature::triangle(2 * mesh.order + 2);
        let (mut sum, mut weights, mut cells) = (0.0f64, 0.0f64, 0.0f64);
        for edge in mesh.mesh.boundary.iter().filter(on_circle) {
            cells += 1.0;
            let element = mesh.element(edge.triangle as usize);
            for &(at, w) in &rule {
                let (mut place, mut value) = (Vec2::ZERO, 0.0);
                for (&n, v) in element.iter().zip(basis.values(at)) {
                    place += mesh.nodes[n as usize] * v;
                    value += f(mesh.nodes[n as usize]) * v;
                }
                sum += w * (value - f(place)).powi(2);
                weights += w;
            }
        }
        ((sum / weights).sqrt(), cells)
    };
    let flawed = |mesh: &CurvedMesh| {
        let mut twin = mesh.clone();
        let places = flumeloft::mesh::reference::nodes(mesh.order);
        for (t, triangle) in mesh.mesh.triangles.iter().enumerate() {
            let [a, b, c] = triangle.map(|v| mesh.nodes[v as usize]);
            for (i, [x, y]) in places.iter().enumerate().skip(3 * mesh.order) {
                twin.nodes[mesh.element(t)[i] as usize] = a * (1.0 - x - y) + b * *x + c * *y;
            }
        }
        twin
    };
    // The third derivative of a cubic spline jumps at its knots: with 48 of them orders 4 and 5 level off at an error
    // of 1e-10 (measured: 4.9 and 4.4 in place of 5.0 and 6.0), with these not before 1e-12.
    const SMOOTH: usize = 384;
    for order in 2..=5 {
        let (coarse, fine) = (
            circle_of(SMOOTH, order, 2.0).0,
            circle_of(SMOOTH, order, 6.0).0,
        );
        let observed = |coarse: &CurvedMesh, fine: &CurvedMesh| {
            let ((e, n), (e_fine, n_fine)) = (error(coarse), error(fine));
            (e / e_fine).ln() / (n_fine / n).ln()
        };
        let sound = observed(&coarse, &fine);
        let twin = observed(&flawed(&coarse), &flawed(&fine));
        println!("order {order}: observed {sound:.2}, inner nodes left straight {twin:.2}");
        // Half an order for the luck of unstructured meshes.
        assert!(sound > order as f64 + 0.5, "order {order}: {sound}");
        assert!(
            order < 4 || twin < order as f64,
            "order {order}: the twin reaches {twin}"
        );
    }
}
