//! What a formula stands for: a number, a vector, a matrix as a vector of rows.

use leastwise_algebra::{Arena, Budget, Expr, Function, Rational, Stopped};
use std::sync::Arc;

/// The value of a formula.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum Value {
    /// A number.
    Scalar(Expr),
    /// A vector, or a matrix where the components are vectors.
    Vector(Vector),
    /// No value: a finding says why, so what uses it says nothing more.
    Missing,
}

/// The components of a vector, cheap to clone.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Vector {
    /// The components, all of one shape.
    pub items: Arc<[Value]>,
    /// For a rotation matrix made by `turn` and products: the turns from left to right. Its angular velocity follows
    /// from them without a product of the matrix with its derivative.
    pub turns: Option<Arc<[Turn]>>,
}

/// A rotation about a unit vector.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Turn {
    /// The unit vector.
    pub axis: [Expr; 3],
    /// The angle.
    pub angle: Expr,
}

/// The shape of a value.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Shape {
    /// A number.
    Number,
    /// So many components.
    Vector(usize),
    /// Rows and columns.
    Matrix(usize, usize),
}

impl std::fmt::Display for Shape {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Shape::Number => f.write_str("a number"),
            Shape::Vector(n) => write!(f, "a vector of {n} components"),
            Shape::Matrix(n, m) => write!(f, "a {n}×{m} matrix"),
        }
    }
}

impl Value {
    /// A vector of these components.
    pub fn vector(items: Vec<Value>) -> Value {
        Value::Vector(Vector { items: items.into(), turns: None })
    }

    /// A vector of numbers.
    pub fn numbers(items: impl IntoIterator<Item = Expr>) -> Value {
        Value::vector(items.into_iter().map(Value::Scalar).collect())
    }

    /// Its shape; `None` where there is no value.
    pub fn shape(&self) -> Option<Shape> {
        match self {
            Value::Scalar(_) => Some(Shape::Number),
            Value::Missing => None,
            Value::Vector(v) => match v.items.first()? {
                Value::Scalar(_) => Some(Shape::Vector(v.items.len())),
                Value::Vector(row) => Some(Shape::Matrix(v.items.len(), row.items.len())),
                Value::Missing => None,
            },
        }
    }

    /// The number.
    pub fn scalar(&self) -> Option<Expr> {
        match self {
            Value::Scalar(e) => Some(*e),
            _ => None,
        }
    }

    /// Whether there is no value, here or inside.
    pub fn is_missing(&self) -> bool {
        match self {
            Value::Scalar(_) => false,
            Value::Missing => true,
            Value::Vector(v) => v.items.iter().any(Value::is_missing),
        }
    }

    /// All numbers inside, row by row.
    pub fn flat(&self) -> Vec<Expr> {
        match self {
            Value::Scalar(e) => vec![*e],
            Value::Missing => Vec::new(),
            Value::Vector(v) => v.items.iter().flat_map(Value::flat).collect(),
        }
    }

    /// The components of a vector of numbers.
    pub fn components(&self) -> Option<Vec<Expr>> {
        match self {
            Value::Vector(v) => v.items.iter().map(Value::scalar).collect(),
            _ => None,
        }
    }

    /// The rows of a matrix.
    pub fn rows(&self) -> Option<Vec<Vec<Expr>>> {
        match self {
            Value::Vector(v) => v.items.iter().map(Value::components).collect(),
            _ => None,
        }
    }

    /// A matrix of these rows.
    pub fn matrix(rows: Vec<Vec<Expr>>) -> Value {
        Value::vector(rows.into_iter().map(Value::numbers).collect())
    }

    /// The value with `f` done to each number.
    pub fn map(&self, f: &mut dyn FnMut(Expr) -> Result<Expr, Stopped>) -> Result<Value, Stopped> {
        Ok(match self {
            Value::Scalar(e) => Value::Scalar(f(*e)?),
            Value::Missing => Value::Missing,
            Value::Vector(v) => Value::vector(v.items.iter().map(|x| x.map(f)).collect::<Result<_, _>>()?),
        })
    }
}

/// Σ aᵢ bᵢ.
pub fn dot(arena: &mut Arena, a: &[Expr], b: &[Expr]) -> Expr {
    let products: Vec<Expr> = a.iter().zip(b).map(|(x, y)| arena.mul(*x, *y)).collect();
    arena.sum(&products)
}

/// a × b in three dimensions.
pub fn cross(arena: &mut Arena, a: &[Expr], b: &[Expr]) -> Vec<Expr> {
    (0..3).map(|i| minor(arena, a, b, (i + 1) % 3, (i + 2) % 3)).collect()
}

/// aᵢ bⱼ − aⱼ bᵢ.
pub fn minor(arena: &mut Arena, a: &[Expr], b: &[Expr], i: usize, j: usize) -> Expr {
    let (p, q) = (arena.mul(a[i], b[j]), arena.mul(a[j], b[i]));
    arena.sub(p, q)
}

/// √(a·a).
pub fn norm(arena: &mut Arena, a: &[Expr]) -> Expr {
    let squares: Vec<Expr> = a.iter().map(|x| arena.pow(*x, 2)).collect();
    let sum = arena.sum(&squares);
    arena.sqrt(sum)
}

/// The transposed matrix.
pub fn transpose(rows: &[Vec<Expr>]) -> Vec<Vec<Expr>> {
    let width = rows.first().map_or(0, Vec::len);
    (0..width).map(|j| rows.iter().map(|r| r[j]).collect()).collect()
}

/// The product of two matrices, or of matrix and vector, or of vector and matrix, or of two vectors; `None` where the
/// shapes do not fit.
pub fn contract(arena: &mut Arena, a: &Value, b: &Value) -> Option<Value> {
    let (sa, sb) = (a.shape()?, b.shape()?);
    Some(match (sa, sb) {
        (Shape::Vector(n), Shape::Vector(m)) if n == m => Value::Scalar(dot(arena, &a.components()?, &b.components()?)),
        (Shape::Matrix(_, n), Shape::Vector(m)) if n == m => {
            let v = b.components()?;
            Value::numbers(a.rows()?.iter().map(|r| dot(arena, r, &v)).collect::<Vec<_>>())
        }
        (Shape::Vector(n), Shape::Matrix(m, _)) if n == m => {
            let v = a.components()?;
            Value::numbers(transpose(&b.rows()?).iter().map(|c| dot(arena, &v, c)).collect::<Vec<_>>())
        }
        (Shape::Matrix(_, n), Shape::Matrix(m, _)) if n == m => {
            let columns = transpose(&b.rows()?);
            let rows = a.rows()?.iter().map(|r| columns.iter().map(|c| dot(arena, r, c)).collect()).collect();
            let mut out = Value::matrix(rows);
            if let (Value::Vector(p), Value::Vector(q), Value::Vector(r)) = (a, b, &mut out)
                && let (Some(p), Some(q)) = (&p.turns, &q.turns)
            {
                r.turns = Some(p.iter().chain(q.iter()).cloned().collect());
            }
            out
        }
        _ => return None,
    })
}

/// The rotation by `angle` about the unit vector `axis`, by Rodrigues' formula
/// R = cos α + (1 − cos α) n nᵀ + sin α [n]×.
pub fn turn(arena: &mut Arena, axis: [Expr; 3], angle: Expr) -> Value {
    let (c, s) = (arena.call(Function::Cos, &[angle]), arena.call(Function::Sin, &[angle]));
    let rest = arena.sub(Arena::ONE, c);
    let mut rows = Vec::with_capacity(3);
    for i in 0..3 {
        let mut row = Vec::with_capacity(3);
        for j in 0..3 {
            let outer = arena.product(&[rest, axis[i], axis[j]]);
            let other = if i == j {
                c
            } else {
                let k = 3 - i - j;
                let e = arena.mul(s, axis[k]);
                // [n]× has −n₃ at (1, 2), n₂ at (1, 3), −n₁ at (2, 3).
                if (j + 3 - i) % 3 == 1 { arena.neg(e) } else { e }
            };
            row.push(arena.add(outer, other));
        }
        rows.push(row);
    }
    let mut out = Value::matrix(rows);
    if let Value::Vector(v) = &mut out {
        v.turns = Some([Turn { axis, angle }].into());
    }
    out
}

/// The transposed of a product of turns: the turns back, in reverse.
pub fn turned_back(arena: &mut Arena, turns: &[Turn]) -> Arc<[Turn]> {
    turns.iter().rev().map(|t| Turn { axis: t.axis, angle: arena.neg(t.angle) }).collect()
}

/// The angular velocity of the rotation R(t) in the body's axes: vee(Rᵀ Ṙ). Of a product of turns about constant axes
/// by ω(R T) = Tᵀ ω(R) + ω(T), which needs no trigonometric identity.
pub fn spin(arena: &mut Arena, matrix: &Value, budget: &mut Budget) -> Result<Option<Value>, Stopped> {
    let Some(Shape::Matrix(3, 3)) = matrix.shape() else { return Ok(None) };
    let Some(rows) = matrix.rows() else { return Ok(None) };
    if let Value::Vector(Vector { turns: Some(turns), .. }) = matrix
        && let Some(omega) = spin_of_turns(arena, turns, budget)?
    {
        return Ok(Some(Value::numbers(omega)));
    }
    let mut rates = Vec::with_capacity(3);
    for row in &rows {
        rates.push(row.iter().map(|e| arena.total(*e, budget)).collect::<Result<Vec<_>, _>>()?);
    }
    let (columns, rates) = (transpose(&rows), transpose(&rates));
    budget.charge(27)?;
    let entries = [(2, 1), (0, 2), (1, 0)].map(|(i, j)| dot(arena, &columns[i], &rates[j]));
    Ok(Some(Value::numbers(entries)))
}

fn spin_of_turns(arena: &mut Arena, turns: &[Turn], budget: &mut Budget) -> Result<Option<Vec<Expr>>, Stopped> {
    let mut omega = vec![Arena::ZERO; 3];
    for one in turns {
        for e in one.axis {
            if arena.total(e, budget)? != Arena::ZERO {
                return Ok(None);
            }
        }
        let rate = arena.total(one.angle, budget)?;
        let matrix = turn(arena, one.axis, one.angle);
        let Some(columns) = matrix.rows().map(|r| transpose(&r)) else { return Ok(None) };
        budget.charge(27)?;
        omega = (0..3)
            .map(|i| {
                let carried = dot(arena, &columns[i], &omega);
                let own = arena.mul(rate, one.axis[i]);
                arena.add(carried, own)
            })
            .collect();
    }
    Ok(Some(omega))
}

/// `c · value`.
pub fn scaled(arena: &mut Arena, value: &Value, c: Expr) -> Value {
    if c == Arena::ONE {
        return value.clone();
    }
    match value {
        Value::Scalar(e) => Value::Scalar(arena.mul(*e, c)),
        Value::Missing => Value::Missing,
        Value::Vector(v) => Value::vector(v.items.iter().map(|x| scaled(arena, x, c)).collect()),
    }
}

/// Σ ± values of one shape.
pub fn combined(arena: &mut Arena, terms: &[(bool, Value)]) -> Value {
    match &terms[0].1 {
        Value::Scalar(_) => {
            let list: Vec<(Expr, Rational)> = terms
                .iter()
                .filter_map(|(minus, v)| Some((v.scalar()?, if *minus { Rational::MINUS_ONE } else { Rational::ONE })))
                .collect();
            Value::Scalar(arena.linear(&list))
        }
        Value::Missing => Value::Missing,
        Value::Vector(first) => Value::vector(
            (0..first.items.len())
                .map(|k| {
                    let column: Vec<(bool, Value)> = terms
                        .iter()
                        .map(|(minus, v)| {
                            let item = match v {
                                Value::Vector(v) => v.items.get(k).cloned(),
                                _ => None,
                            };
                            (*minus, item.unwrap_or(Value::Missing))
                        })
                        .collect();
                    combined(arena, &column)
                })
                .collect(),
        ),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use leastwise_algebra::Role;

    fn angle(arena: &mut Arena, name: &str) -> (Expr, Expr) {
        let s = arena.symbol(name, None, Role::Coordinate);
        (arena.sym(s), arena.jet(s, 1))
    }

    #[test]
    fn a_turn_about_z_is_the_plane_rotation() {
        let mut a = Arena::new();
        let (g, _) = angle(&mut a, "γ");
        let r = turn(&mut a, [Arena::ZERO, Arena::ZERO, Arena::ONE], g);
        let (c, s) = (a.call(Function::Cos, &[g]), a.call(Function::Sin, &[g]));
        let (minus, zero) = (a.neg(s), Arena::ZERO);
        let expected = vec![vec![c, minus, zero], vec![s, c, zero], vec![zero, zero, Arena::ONE]];
        assert_eq!(r.rows(), Some(expected));
    }

    #[test]
    fn the_spin_of_a_turn_is_its_rate_along_the_axis() {
        let mut a = Arena::new();
        let mut budget = Budget::new(100_000);
        let ((g, rate), (b, other)) = (angle(&mut a, "γ"), angle(&mut a, "β"));
        let z = turn(&mut a, [Arena::ZERO, Arena::ZERO, Arena::ONE], g);
        let y = turn(&mut a, [Arena::ZERO, Arena::ONE, Arena::ZERO], b);
        let omega = spin(&mut a, &z, &mut budget).unwrap().unwrap();
        assert_eq!(omega, Value::numbers([Arena::ZERO, Arena::ZERO, rate]));
        // R = turn(y, β) · turn(z, γ): ω = (β̇ sin γ, β̇ cos γ, γ̇).
        let r = contract(&mut a, &y, &z).unwrap();
        let omega = spin(&mut a, &r, &mut budget).unwrap().unwrap();
        let (c, s) = (a.call(Function::Cos, &[g]), a.call(Function::Sin, &[g]));
        let expected = [a.mul(other, s), a.mul(other, c), rate];
        assert_eq!(omega, Value::numbers(expected));
    }
}
