//! The first Brillouin zone of plane lattices: textbook corners and edges, weights that add up, any basis.

use std::f64::consts::{PI, TAU};

use planish::theory::{BrillouinZone, PlaneCell};

const GRAPHENE: f64 = 2.46;

fn hexagonal(a: f64) -> [[f64; 2]; 2] {
    [[a, 0.0], [-0.5 * a, 0.5 * 3.0_f64.sqrt() * a]]
}

fn close(left: f64, right: f64) {
    assert!(
        (left - right).abs() < 1e-12 * right.abs().max(1.0),
        "{left} is not {right}"
    );
}

/// K = 4 pi/3a and M = 2 pi/(sqrt(3) a) of the hexagonal lattice (Katsnelson, The Physics of Graphene, ch. 1).
#[test]
fn hexagonal_zone_has_the_textbook_corners_and_edges() {
    let zone = BrillouinZone::of_lattice(hexagonal(GRAPHENE));
    let corner = 4.0 * PI / (3.0 * GRAPHENE);
    let edge = TAU / (3.0_f64.sqrt() * GRAPHENE);
    close(zone.circumradius(), corner);
    close(
        zone.area(),
        TAU * TAU / (0.5 * 3.0_f64.sqrt() * GRAPHENE * GRAPHENE),
    );
    // With a along x a corner lies along x, and the middle of an edge along y.
    assert_eq!(zone.weight([0.0, 0.0]), 1.0);
    close(zone.weight([corner, 0.0]), 1.0 / 3.0);
    close(
        zone.weight([0.5 * corner, 0.5 * 3.0_f64.sqrt() * corner]),
        1.0 / 3.0,
    );
    close(zone.weight([0.0, edge]), 0.5);
    close(zone.weight([0.1 * corner, edge]), 0.5);
    assert_eq!(zone.weight([0.999_99 * corner, 0.0]), 1.0);
    assert_eq!(zone.weight([1.000_01 * corner, 0.0]), 0.0);
    assert_eq!(zone.weight([0.0, 0.999_99 * edge]), 1.0);
    assert_eq!(zone.weight([0.0, 1.000_01 * edge]), 0.0);
}

/// X = pi/a and M = sqrt(2) pi/a of the square lattice (Ashcroft and Mermin, Solid State Physics, ch. 5).
#[test]
fn square_zone_has_the_textbook_corners_and_edges() {
    let zone = BrillouinZone::of_lattice([[0.0, 3.0], [3.0, 0.0]]);
    close(zone.circumradius(), 2.0_f64.sqrt() * PI / 3.0);
    close(zone.weight([PI / 3.0, 0.0]), 0.5);
    close(zone.weight([0.2, -PI / 3.0]), 0.5);
    close(zone.weight([-PI / 3.0, PI / 3.0]), 0.25);
    assert_eq!(zone.weight([1.05, 0.0]), 0.0);
}

/// The lattice decides, not the basis that describes it.
#[test]
fn any_basis_of_a_lattice_gives_the_same_zone() {
    let [a, b] = [[2.3, 0.2], [0.7, 3.1]];
    let zone = BrillouinZone::of_lattice([a, b]);
    for [[i, j], [k, l]] in [
        [[1.0, 4.0], [0.0, 1.0]],
        [[3.0, 2.0], [4.0, 3.0]],
        [[0.0, 1.0], [1.0, -7.0]],
    ] {
        let basis = [
            [i * a[0] + j * b[0], i * a[1] + j * b[1]],
            [k * a[0] + l * b[0], k * a[1] + l * b[1]],
        ];
        let other = BrillouinZone::of_lattice(basis);
        close(other.circumradius(), zone.circumradius());
        for step in 0..400 {
            let (radius, angle) = (0.005 * f64::from(step), 0.7 * f64::from(step));
            let q = [radius * angle.cos(), radius * angle.sin()];
            assert_eq!(zone.weight(q), other.weight(q), "at {q:?}");
        }
    }
}

/// A periodic box of N primitive cells has exactly N modes in the zone, edges counted by their weights: for boxes with
/// modes on edges and corners as well, whatever their shape.
#[test]
fn weights_of_a_box_add_up_to_its_number_of_primitive_cells() {
    let [a, b] = hexagonal(2.5);
    let boxes = [
        [[6, 0], [0, 6]],
        [[6, 0], [3, 6]],
        [[7, 0], [0, 5]],
        [[8, 2], [-1, 9]],
        [[12, 0], [4, 8]],
    ];
    for [[i, j], [k, l]] in boxes {
        let at = |m: i32, n: i32| {
            let (m, n) = (f64::from(m), f64::from(n));
            [m * a[0] + n * b[0], m * a[1] + n * b[1]]
        };
        let cell = PlaneCell {
            a: at(i, j),
            b: at(k, l),
        };
        let zone = BrillouinZone::of_lattice([a, b]);
        let mut total = 0.0;
        for m1 in -40..=40 {
            for m2 in -40..=40 {
                total += zone.weight(cell.wave_vector([m1, m2]));
            }
        }
        close(total, f64::from(i * l - j * k));
    }
}
