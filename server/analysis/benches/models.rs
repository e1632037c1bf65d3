//! The speed problems as model texts: the same as in `tests/bench/problems.py`.

/// A chain of `n` links in a plane.
pub fn links(n: usize) -> String {
    format!(
        "system links_{n}, dimensionless
index i: 1..{n}
coordinate θ[i]: angle
parameter m[i], l[i], g
let P[i] = (sum(j in 1..i: l[j] sin θ[j]), -sum(j in 1..i: l[j] cos θ[j]))
kinetic   bobs   = sum(i: 1/2 m[i] |P[i]'|^2)
potential weight = sum(i: m[i] g P[i][2])
broken symmetry turn: θ[i] -> θ[i] + ε
symmetry delay: t -> t + ε
"
    )
}

/// `n` masses on a line, springs between neighbours.
pub fn line(n: usize) -> String {
    let last = n - 1;
    format!(
        "system line_{n}, dimensionless
index i: 1..{n}
coordinate x[i]
parameter m[i], k[i]
kinetic   masses  = sum(i: 1/2 m[i] x[i]'^2)
potential springs = sum(i in 1..{last}: 1/2 k[i] (x[i+1] - x[i])^2)
symmetry shift: x[i] -> x[i] + ε
symmetry delay: t -> t + ε
"
    )
}

/// `n` bodies in space that attract each other.
pub fn bodies(n: usize) -> String {
    let last = n - 1;
    format!(
        "system bodies_{n}, dimensionless
index i: 1..{n}
coordinate x[i], y[i], z[i]
parameter m[i], G
let R[i] = (x[i], y[i], z[i])
kinetic   bodies  = sum(i: 1/2 m[i] |R[i]'|^2)
potential gravity = -sum(i in 1..{last}: sum(j in i+1..{n}: G m[i] m[j]/|R[i] - R[j]|))
symmetry turn: x[i] -> x[i] cos ε - y[i] sin ε, y[i] -> x[i] sin ε + y[i] cos ε
symmetry shift: x[i] -> x[i] + ε
symmetry boost: x[i] -> x[i] + ε t
symmetry delay: t -> t + ε
"
    )
}

/// The heavy symmetric top.
pub fn heavy_top() -> String {
    "system heavy_top, dimensionless
coordinate φ, θ, ψ: angle
parameter I₁, I₃, m, g, l
kinetic   tilt   = 1/2 I₁ (θ'^2 + φ'^2 sin² θ)
kinetic   spin   = 1/2 I₃ (ψ' + φ' cos θ)^2
potential weight = m g l cos θ
symmetry precession: φ -> φ + ε
symmetry roll: ψ -> ψ + ε
symmetry delay: t -> t + ε
"
    .to_string()
}

/// A particle in a central field, spherical coordinates, with a rotation about a horizontal axis.
pub fn central_field() -> String {
    "system central_field, dimensionless
coordinate r
coordinate θ, φ: angle
parameter m, k, b
assume r > 0
let P = (r sin θ cos φ, r sin θ sin φ, r cos θ)
kinetic   particle = 1/2 m |P'|^2
potential centre   = -k/r + b r^2
symmetry tilt: θ -> θ - ε sin φ, φ -> φ - ε cos θ cos φ/sin θ
symmetry delay: t -> t + ε
"
    .to_string()
}

/// An edit of a potential term, never the same for two numbers, in text or meaning.
pub fn edit_potential(text: &str, k: usize) -> String {
    let k = k + 3;
    text.replace("sum(i: m[i] g P[i][2])", &format!("sum(i: m[i] g P[i][2]) + {k}/1009 m[1] g l[1] sin θ[1]"))
        .replace("sum(j in i+1", &format!("{k}/1009 sum(j in i+1"))
}

/// An edit of one kinetic summand.
pub fn edit_kinetic(text: &str, k: usize) -> String {
    let k = k + 3;
    text.replace("sum(i: 1/2 m[i] |P[i]'|^2)", &format!("sum(i: 1/2 m[i] |P[i]'|^2) + {k}/1009 m[1] l[1]^2 θ[1]'^2"))
}

/// An edit of the definition that all terms use.
pub fn edit_let(text: &str, k: usize) -> String {
    let k = k + 3;
    text.replace("l[j] sin θ[j]", &format!("{k}/1009 l[j] sin θ[j]"))
}
