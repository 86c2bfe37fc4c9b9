//! Prints metrics at points with what we compute from them, and matrices of integers with theirs, as JSON for
//! `tests/references/geometry.py`, which computes the same with SymPy.
//!
//! A metric is written once: each entry is built as a text that SymPy reads and as a jet at the same time. All
//! numbers are texts: fractions, or residues beside their modulus.

#![allow(clippy::unwrap_used)]

use std::ops::{Add, Div, Mul, Sub};
use std::sync::Arc;

use indexwise_algebra::draws::Draws;
use indexwise_algebra::field::{FIRST, Residue, SECOND};
use indexwise_algebra::geometry::{Geometry, Signs};
use indexwise_algebra::jet::{Jet, Ring, Variable};
use indexwise_algebra::matrix;
use indexwise_algebra::number::{Exact, Number};
use indexwise_algebra::tensor::Tensor;
use indexwise_algebra::trouble::{Outcome, Trouble};
use serde_json::{Value, json};

/// Matrices of every size up to this one.
const LARGEST_MATRIX: usize = 5;

/// How many matrices of a size, every second one singular.
const MATRICES: usize = 4;

/// A number that can be printed.
trait Printed: Number {
    /// What it is reduced modulo; nothing for fractions.
    const MODULUS: Option<u64>;

    fn printed(self) -> String;
}

impl Printed for Exact {
    const MODULUS: Option<u64> = None;

    fn printed(self) -> String {
        self.to_string()
    }
}

impl<const P: u64> Printed for Residue<P> {
    const MODULUS: Option<u64> = Some(P);

    fn printed(self) -> String {
        self.value().to_string()
    }
}

/// A function of the coordinates: as SymPy reads it, and as a jet.
#[derive(Clone)]
struct Written<N> {
    text: String,
    jet: Jet<N>,
}

impl<N: Number> Written<N> {
    fn combined(self, sign: &str, other: Self, jet: Outcome<Jet<N>>) -> Self {
        Self { text: format!("({} {sign} {})", self.text, other.text), jet: jet.unwrap() }
    }
}

impl<N: Number> Add for Written<N> {
    type Output = Self;

    fn add(self, other: Self) -> Self {
        let jet = self.jet.plus(&other.jet);
        self.combined("+", other, jet)
    }
}

impl<N: Number> Sub for Written<N> {
    type Output = Self;

    fn sub(self, other: Self) -> Self {
        let jet = self.jet.minus(&other.jet);
        self.combined("-", other, jet)
    }
}

impl<N: Number> Mul for Written<N> {
    type Output = Self;

    fn mul(self, other: Self) -> Self {
        let jet = self.jet.times(&other.jet);
        self.combined("*", other, jet)
    }
}

impl<N: Number> Div for Written<N> {
    type Output = Self;

    fn div(self, other: Self) -> Self {
        let jet = self.jet.over(&other.jet);
        self.combined("/", other, jet)
    }
}

/// A point, with what functions are written in.
struct Chart<N> {
    ring: Arc<Ring>,
    coordinates: Vec<Written<N>>,
}

impl<N: Number> Chart<N> {
    /// Coordinates `x0`, `x1`, .. about a point given by fractions.
    fn at(point: &[(i64, i64)]) -> Self {
        let ring = Ring::new(point.len(), 2).unwrap();
        let coordinate = |(place, (upper, lower)): (usize, &(i64, i64))| {
            let value = N::from_integer(*upper) * N::from_integer(*lower).inverse().unwrap();
            Written { text: format!("x{place}"), jet: Jet::variable(&ring, Variable::Base(place), value).unwrap() }
        };
        let coordinates = point.iter().enumerate().map(coordinate).collect();
        Self { coordinates, ring }
    }

    fn x(&self, place: usize) -> Written<N> {
        self.coordinates[place].clone()
    }

    fn number(&self, number: i64) -> Written<N> {
        Written { text: format!("({number})"), jet: Jet::constant(&self.ring, N::from_integer(number)) }
    }

    fn diagonal(&self, entries: Vec<Written<N>>) -> Vec<Written<N>> {
        let size = entries.len();
        let entry =
            |place: usize| if place.is_multiple_of(size + 1) { entries[place / size].clone() } else { self.number(0) };
        (0..size * size).map(entry).collect()
    }
}

/// The entries of a metric, row by row.
type Metric<N> = fn(&Chart<N>) -> Vec<Written<N>>;

/// A metric at a point.
struct Case<N> {
    name: &'static str,
    /// The coordinates, each as a fraction.
    point: &'static [(i64, i64)],
    metric: Metric<N>,
    /// Whether the metric has no structure that keeps formulas short.
    general: bool,
}

fn cases<N: Number>() -> Vec<Case<N>> {
    let case = |name, point, metric, general| Case { name, point, metric, general };
    vec![
        case("plane, polar coordinates", &[(2, 1), (1, 3)], plane, false),
        case("sphere of radius 3, cosine of the polar angle", &[(1, 3), (2, 5)], sphere, false),
        case("hyperbolic half-plane", &[(-1, 2), (3, 2)], hyperbolic, false),
        case("thin shell, a surface of revolution with thickness", &[(1, 2), (3, 1), (1, 5)], shell, false),
        case("mass point at rest", &[(0, 1), (5, 1), (1, 2), (1, 7)], at_rest, false),
        case("rotating mass", &[(0, 1), (3, 1), (1, 2), (1, 7)], rotating, false),
        case("random polynomials, two dimensions", &[(1, 2), (-1, 3)], polynomials, true),
        case("random polynomials, three dimensions", &[(1, 1), (2, 1), (-1, 1)], polynomials, true),
        case("random polynomials, four dimensions", &[(1, 1), (-2, 1), (1, 2), (1, 1)], polynomials, true),
    ]
}

fn plane<N: Number>(chart: &Chart<N>) -> Vec<Written<N>> {
    chart.diagonal(vec![chart.number(1), chart.x(0) * chart.x(0)])
}

fn sphere<N: Number>(chart: &Chart<N>) -> Vec<Written<N>> {
    let width = chart.number(1) - chart.x(0) * chart.x(0);
    chart.diagonal(vec![chart.number(9) / width.clone(), chart.number(9) * width])
}

fn hyperbolic<N: Number>(chart: &Chart<N>) -> Vec<Written<N>> {
    let entry = chart.number(1) / (chart.x(1) * chart.x(1));
    chart.diagonal(vec![entry.clone(), entry])
}

/// Along the meridian, around the axis, and through the thickness.
fn shell<N: Number>(chart: &Chart<N>) -> Vec<Written<N>> {
    let (s, z) = (chart.x(0), chart.x(2));
    let radius = chart.number(2) + s.clone() * s + z.clone();
    let stretch = chart.number(1) + z.clone() * z;
    let mut entries = chart.diagonal(vec![stretch.clone() * stretch, radius.clone() * radius, chart.number(1)]);
    let shear = chart.x(0) * chart.x(2);
    (entries[2], entries[6]) = (shear.clone(), shear);
    entries
}

/// Schwarzschild's metric of mass 1, the polar angle by its cosine.
fn at_rest<N: Number>(chart: &Chart<N>) -> Vec<Written<N>> {
    let (r, u) = (chart.x(1), chart.x(2));
    let f = chart.number(1) - chart.number(2) / r.clone();
    let width = chart.number(1) - u.clone() * u;
    let square = r.clone() * r;
    let entries =
        vec![chart.number(-1) * f.clone(), chart.number(1) / f, square.clone() / width.clone(), square * width];
    chart.diagonal(entries)
}

/// Kerr's metric of mass 1 and angular momentum 1 in the coordinates of Boyer and Lindquist, the polar angle by its
/// cosine.
fn rotating<N: Number>(chart: &Chart<N>) -> Vec<Written<N>> {
    let (one, two, r, u) = (chart.number(1), chart.number(2), chart.x(1), chart.x(2));
    let (square, cosines) = (r.clone() * r.clone(), u.clone() * u);
    let sigma = square.clone() + cosines.clone();
    let delta = square.clone() - two.clone() * r.clone() + one.clone();
    let width = one.clone() - cosines;
    let pull = two * r / sigma.clone();
    let around = width.clone() * (square + one.clone() + pull.clone() * width.clone());
    let mut entries = chart.diagonal(vec![pull.clone() - one, sigma.clone() / delta, sigma / width.clone(), around]);
    let drag = chart.number(-1) * pull * width;
    (entries[3], entries[12]) = (drag.clone(), drag);
    entries
}

/// Polynomials of the second degree with small coefficients, plus 7 on the diagonal.
fn polynomials<N: Number>(chart: &Chart<N>) -> Vec<Written<N>> {
    let size = chart.coordinates.len();
    let mut draws = Draws::from_seed(size as u64);
    let mut small = || chart.number(draws.below(5).cast_signed() - 2);
    let mut entries = chart.diagonal(vec![chart.number(7); size]);
    for row in 0..size {
        for column in row..size {
            let linear = (0..size).map(|place| chart.x(place) * small()).reduce(Add::add).unwrap();
            let squares = (0..size).map(|place| chart.x(place) * chart.x((place + 1) % size) * small());
            let field = linear + squares.reduce(Add::add).unwrap() + small();
            entries[row * size + column] = entries[row * size + column].clone() + field;
            entries[column * size + row] = entries[row * size + column].clone();
        }
    }
    entries
}

fn printed<N: Printed>(tensor: &Tensor<N>) -> Vec<String> {
    tensor.values().iter().map(|number| number.printed()).collect()
}

/// A case as computed with one kind of numbers; nothing if the fractions grow too large.
fn metric_case<N: Printed>(case: &Case<N>) -> Outcome<Value> {
    let chart = Chart::at(case.point);
    let entries = (case.metric)(&chart);
    let jets: Vec<Jet<N>> = entries.iter().map(|entry| entry.jet.clone()).collect();
    let size = case.point.len();
    let space = Geometry::new(Tensor::from_jets(&[size, size], &jets)?, Signs::default())?;
    let scalar = Tensor::scalar(&space.scalar()?).sound()?;
    Ok(json!({
        "name": case.name,
        "modulus": N::MODULUS.map(|modulus| modulus.to_string()),
        "general": case.general,
        "point": case.point.iter().map(|(upper, lower)| format!("{upper}/{lower}")).collect::<Vec<_>>(),
        "metric": entries.iter().map(|entry| entry.text.clone()).collect::<Vec<_>>(),
        "determinant": printed(&Tensor::scalar(space.determinant())),
        "inverse": printed(space.inverse()),
        "christoffel": printed(space.christoffel()?),
        "riemann": printed(space.riemann()?),
        "ricci": printed(space.ricci()?),
        "scalar": printed(&scalar),
        "einstein": printed(&space.einstein()?.sound()?),
    }))
}

/// The cases for one kind of numbers; those whose fractions do not fit are named on the error output.
fn metric_cases<N: Printed>() -> Vec<Value> {
    let mut computed = Vec::new();
    for case in cases::<N>() {
        match metric_case(&case) {
            Err(Trouble::Overflow) => eprintln!("{}: too large for fractions", case.name),
            outcome => computed.push(outcome.unwrap()),
        }
    }
    computed
}

fn matrix_case<N: Printed>(entries: &[i64], size: usize) -> Value {
    let ring = Ring::new(0, 0).unwrap();
    let entry = |component: &[usize]| N::from_integer(entries[component[0] * size + component[1]]);
    let tensor = Tensor::from_numbers(&ring, &[size, size], entry).unwrap();
    let characteristic = matrix::characteristic(&tensor).unwrap();
    let inverse = match matrix::inverse(&tensor) {
        Err(Trouble::ZeroDivisor) => None,
        inverse => Some(printed(&inverse.unwrap())),
    };
    json!({
        "size": size,
        "modulus": N::MODULUS.map(|modulus| modulus.to_string()),
        "matrix": entries,
        "determinant": [characteristic.determinant.value().printed()],
        "adjugate": printed(&characteristic.adjugate),
        "characteristic": characteristic.coefficients.iter().map(|c| c.value().printed()).collect::<Vec<_>>(),
        "inverse": inverse,
    })
}

/// Integers of one digit; the last row of every second matrix is the sum of the others.
fn matrix_cases() -> Vec<Value> {
    let mut draws = Draws::from_seed(1);
    let mut cases = Vec::new();
    for (size, number) in (1..=LARGEST_MATRIX).flat_map(|size| (0..MATRICES).map(move |number| (size, number))) {
        let mut entries: Vec<i64> = (0..size * size).map(|_| draws.below(19).cast_signed() - 9).collect();
        if number % 2 == 1 {
            for column in 0..size {
                let others = (0..size - 1).map(|row| entries[row * size + column]).sum();
                entries[(size - 1) * size + column] = others;
            }
        }
        cases.push(matrix_case::<Exact>(&entries, size));
        cases.push(matrix_case::<Residue<FIRST>>(&entries, size));
        cases.push(matrix_case::<Residue<SECOND>>(&entries, size));
    }
    cases
}

fn main() {
    let metrics =
        [metric_cases::<Exact>(), metric_cases::<Residue<FIRST>>(), metric_cases::<Residue<SECOND>>()].concat();
    println!("{:#}", json!({ "metrics": metrics, "matrices": matrix_cases() }));
}
