//! Plain algebra as the reference files write it, evaluated with exact derivatives by dual numbers.

use std::collections::BTreeMap;

const MOST: usize = 9;

/// A value with its derivatives by b1…b9.
#[derive(Clone, Copy, Debug)]
pub struct Dual {
    pub value: f64,
    pub slopes: [f64; MOST],
}

impl Dual {
    fn constant(value: f64) -> Self {
        Self {
            value,
            slopes: [0.0; MOST],
        }
    }

    fn chain(self, value: f64, slope: f64) -> Self {
        Self {
            value,
            slopes: self.slopes.map(|s| s * slope),
        }
    }

    fn combine(self, other: Self, value: f64, by_self: f64, by_other: f64) -> Self {
        let mut slopes = [0.0; MOST];
        for (i, s) in slopes.iter_mut().enumerate() {
            *s = self.slopes[i] * by_self + other.slopes[i] * by_other;
        }
        Self { value, slopes }
    }

    fn power(self, other: Self) -> Self {
        let value = self.value.powf(other.value);
        let by_base = other.value * self.value.powf(other.value - 1.0);
        let moves = other.slopes.iter().any(|s| *s != 0.0);
        let by_exponent = if moves { value * self.value.ln() } else { 0.0 };
        self.combine(other, value, by_base, by_exponent)
    }
}

/// A parsed expression.
pub enum Expression {
    Number(f64),
    Name(String),
    Call(String, Box<Expression>),
    Two(char, Box<Expression>, Box<Expression>),
}

impl Expression {
    pub fn parse(text: &str) -> Self {
        let flat: Vec<char> = text
            .replace("**", "^")
            .chars()
            .filter(|c| !c.is_whitespace())
            .collect();
        let mut at = 0;
        let e = sum(&flat, &mut at);
        assert_eq!(at, flat.len(), "unread text in {text:?}");
        e
    }

    pub fn evaluate(&self, p: &[f64], x: &BTreeMap<String, f64>) -> Dual {
        match self {
            Self::Number(v) => Dual::constant(*v),
            Self::Name(name) if name == "pi" => Dual::constant(std::f64::consts::PI),
            Self::Name(name) => match x.get(name) {
                Some(v) => Dual::constant(*v),
                None => {
                    let i: usize = name[1..].parse().expect("a parameter like b3");
                    let mut d = Dual::constant(p[i - 1]);
                    d.slopes[i - 1] = 1.0;
                    d
                }
            },
            Self::Call(name, inner) => call(name, inner.evaluate(p, x)),
            Self::Two(sign, a, b) => {
                let (a, b) = (a.evaluate(p, x), b.evaluate(p, x));
                let (u, v) = (a.value, b.value);
                match sign {
                    '+' => a.combine(b, u + v, 1.0, 1.0),
                    '-' => a.combine(b, u - v, 1.0, -1.0),
                    '*' => a.combine(b, u * v, v, u),
                    '/' => a.combine(b, u / v, 1.0 / v, -u / (v * v)),
                    _ => a.power(b),
                }
            }
        }
    }
}

fn call(name: &str, d: Dual) -> Dual {
    let v = d.value;
    match name {
        "exp" => d.chain(v.exp(), v.exp()),
        "log" => d.chain(v.ln(), 1.0 / v),
        "sin" => d.chain(v.sin(), v.cos()),
        "cos" => d.chain(v.cos(), -v.sin()),
        "atan" | "arctan" => d.chain(v.atan(), 1.0 / (1.0 + v * v)),
        "sqrt" => d.chain(v.sqrt(), 0.5 / v.sqrt()),
        _ => panic!("function {name} is not known"),
    }
}

fn sum(s: &[char], at: &mut usize) -> Expression {
    let mut left = product(s, at);
    while *at < s.len() && "+-".contains(s[*at]) {
        let sign = s[*at];
        *at += 1;
        left = Expression::Two(sign, Box::new(left), Box::new(product(s, at)));
    }
    left
}

fn product(s: &[char], at: &mut usize) -> Expression {
    let mut left = signed(s, at);
    while *at < s.len() && "*/".contains(s[*at]) {
        let sign = s[*at];
        *at += 1;
        left = Expression::Two(sign, Box::new(left), Box::new(signed(s, at)));
    }
    left
}

fn signed(s: &[char], at: &mut usize) -> Expression {
    if *at < s.len() && "+-".contains(s[*at]) {
        let sign = s[*at];
        *at += 1;
        return Expression::Two(
            sign,
            Box::new(Expression::Number(0.0)),
            Box::new(signed(s, at)),
        );
    }
    let base = atom(s, at);
    if *at < s.len() && s[*at] == '^' {
        *at += 1;
        return Expression::Two('^', Box::new(base), Box::new(signed(s, at)));
    }
    base
}

fn atom(s: &[char], at: &mut usize) -> Expression {
    if "([".contains(s[*at]) {
        *at += 1;
        let inner = sum(s, at);
        assert!(")]".contains(s[*at]), "an open bracket");
        *at += 1;
        return inner;
    }
    let from = *at;
    if s[from].is_alphabetic() {
        while *at < s.len() && s[*at].is_alphanumeric() {
            *at += 1;
        }
        let name: String = s[from..*at].iter().collect();
        if *at < s.len() && "([".contains(s[*at]) {
            return Expression::Call(name, Box::new(atom(s, at)));
        }
        return Expression::Name(name);
    }
    while *at < s.len()
        && (s[*at].is_ascii_digit()
            || ".eE".contains(s[*at])
            || ("+-".contains(s[*at]) && "eE".contains(s[*at - 1])))
    {
        *at += 1;
    }
    let text: String = s[from..*at].iter().collect();
    Expression::Number(text.parse().unwrap_or_else(|_| panic!("number {text:?}")))
}
