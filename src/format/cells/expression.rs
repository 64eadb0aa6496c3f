//! Function expressions of Liberty pins.
//!
//! As the open Liberty description has them (from memory): names; `0` and `1`;
//! `!` before or `'` after an operand inverts; `^` is exclusive or; `&`, `*` or
//! nothing at all is AND; `+` or `|` is OR; parentheses. Inversion binds closest,
//! then `^`, then AND, then OR.
//!
//! An expression becomes one function of its pins: a table up to six, beyond that
//! a cover by multiplying out, of at most [`MOST_CUBES`] rows.

use crate::netlist::function::PIN;
use crate::netlist::{Cover, Function, TruthTable};
use crate::source::quote;

/// Most rows of a cover.
const MOST_CUBES: usize = 1024;
/// Most parentheses inside each other.
const DEEPEST: usize = 64;
/// Longest expression.
const LONGEST: usize = 1 << 12;

enum Expression {
    Constant(bool),
    Pin(usize),
    Not(Box<Expression>),
    Xor(Box<Expression>, Box<Expression>),
    And(Vec<Expression>),
    Or(Vec<Expression>),
}

/// A function and the names of its pins.
pub(super) struct Expressed {
    pub(super) function: Function,
    pub(super) pins: Vec<String>,
}

/// Reads an expression; the error says what was expected.
pub(super) fn read(text: &str) -> Result<Expressed, String> {
    if text.len() > LONGEST {
        return Err(format!("an expression of at most {LONGEST} characters"));
    }
    let mut parser = Parser {
        rest: text,
        pins: Vec::new(),
        depth: 0,
    };
    let expression = parser.or()?;
    parser.skip();
    if !parser.rest.is_empty() {
        return Err(format!("an operator or the end {}", before(parser.rest)));
    }
    let pins = parser.pins;
    let function = function(&expression, pins.len())
        .ok_or_else(|| format!("a function of at most {MOST_CUBES} rows"))?;
    Ok(Expressed { function, pins })
}

/// Where in an expression, in words.
fn before(rest: &str) -> String {
    match rest.trim() {
        "" => "at the end of the expression".to_owned(),
        rest => {
            let start: String = rest.chars().take(20).collect();
            format!("before {}", quote(start.as_bytes()))
        }
    }
}

fn is_name(c: char) -> bool {
    c.is_alphanumeric() || matches!(c, '_' | '[' | ']' | '.' | '$' | ':')
}

struct Parser<'t> {
    rest: &'t str,
    pins: Vec<String>,
    depth: usize,
}

impl Parser<'_> {
    fn skip(&mut self) {
        self.rest = self.rest.trim_start();
    }

    fn take(&mut self, signs: &[char]) -> bool {
        self.skip();
        let found = self.rest.starts_with(signs);
        if found {
            self.rest = &self.rest[1..];
        }
        found
    }

    fn or(&mut self) -> Result<Expression, String> {
        let mut terms = vec![self.and()?];
        while self.take(&['+', '|']) {
            terms.push(self.and()?);
        }
        Ok(single(terms, Expression::Or))
    }

    fn and(&mut self) -> Result<Expression, String> {
        let mut factors = vec![self.xor()?];
        loop {
            let written = self.take(&['&', '*']);
            self.skip();
            let follows = self
                .rest
                .starts_with(|c: char| is_name(c) || matches!(c, '!' | '(' | '"'));
            if !written && !follows {
                break;
            }
            factors.push(self.xor()?);
        }
        Ok(single(factors, Expression::And))
    }

    fn xor(&mut self) -> Result<Expression, String> {
        let mut left = self.operand()?;
        while self.take(&['^']) {
            let right = self.operand()?;
            left = Expression::Xor(Box::new(left), Box::new(right));
        }
        Ok(left)
    }

    fn operand(&mut self) -> Result<Expression, String> {
        let mut inverted = false;
        while self.take(&['!']) {
            inverted = !inverted;
        }
        self.skip();
        let mut found = if self.take(&['(']) {
            self.depth += 1;
            if self.depth > DEEPEST {
                return Err(format!("at most {DEEPEST} parentheses inside each other"));
            }
            let inner = self.or()?;
            self.depth -= 1;
            if !self.take(&[')']) {
                return Err(format!("`)` {}", before(self.rest)));
            }
            inner
        } else {
            let end = self.rest.find(|c| !is_name(c)).unwrap_or(self.rest.len());
            let (name, rest) = self.rest.split_at(end);
            if name.is_empty() {
                return Err(format!("a pin {}", before(rest)));
            }
            self.rest = rest;
            match name {
                "0" => Expression::Constant(false),
                "1" => Expression::Constant(true),
                _ => Expression::Pin(self.pin(name)),
            }
        };
        while self.take(&['\'']) {
            inverted = !inverted;
        }
        if inverted {
            found = Expression::Not(Box::new(found));
        }
        Ok(found)
    }

    fn pin(&mut self, name: &str) -> usize {
        let known = self.pins.iter().position(|pin| pin == name);
        known.unwrap_or_else(|| {
            self.pins.push(name.to_owned());
            self.pins.len() - 1
        })
    }
}

fn single(mut terms: Vec<Expression>, join: fn(Vec<Expression>) -> Expression) -> Expression {
    match terms.len() {
        1 => terms.remove(0),
        _ => join(terms),
    }
}

fn function(expression: &Expression, pins: usize) -> Option<Function> {
    if pins <= TruthTable::MAX_INPUTS {
        return Some(Function::Table(TruthTable::new(pins, value(expression))));
    }
    let cubes = rows(expression, false)?;
    Some(Function::from_cover(Cover::new(pins, false, cubes)))
}

fn value(expression: &Expression) -> u64 {
    match expression {
        Expression::Constant(value) => {
            if *value {
                !0
            } else {
                0
            }
        }
        Expression::Pin(pin) => PIN[*pin],
        Expression::Not(inner) => !value(inner),
        Expression::Xor(left, right) => value(left) ^ value(right),
        Expression::And(all) => all.iter().fold(!0, |so_far, each| so_far & value(each)),
        Expression::Or(all) => all.iter().fold(0, |so_far, each| so_far | value(each)),
    }
}

type Cube = Vec<(usize, bool)>;

/// The expression, or its complement, as a sum of products.
fn rows(expression: &Expression, inverted: bool) -> Option<Vec<Cube>> {
    match expression {
        Expression::Constant(value) if *value != inverted => Some(vec![Vec::new()]),
        Expression::Constant(_) => Some(Vec::new()),
        Expression::Pin(pin) => Some(vec![vec![(*pin, inverted)]]),
        Expression::Not(inner) => rows(inner, !inverted),
        Expression::Xor(left, right) => {
            let one = product(&rows(left, false)?, &rows(right, !inverted)?)?;
            let other = product(&rows(left, true)?, &rows(right, inverted)?)?;
            bounded([one, other].concat())
        }
        Expression::And(all) if !inverted => multiply(all, false),
        Expression::Or(all) if inverted => multiply(all, true),
        Expression::And(all) | Expression::Or(all) => {
            let mut sum = Vec::new();
            for each in all {
                sum.extend(rows(each, inverted)?);
            }
            bounded(sum)
        }
    }
}

fn multiply(all: &[Expression], inverted: bool) -> Option<Vec<Cube>> {
    let mut so_far = vec![Vec::new()];
    for each in all {
        so_far = product(&so_far, &rows(each, inverted)?)?;
    }
    Some(so_far)
}

fn product(left: &[Cube], right: &[Cube]) -> Option<Vec<Cube>> {
    if left.len().saturating_mul(right.len()) > MOST_CUBES * 4 {
        return None;
    }
    let mut cubes = Vec::new();
    for a in left {
        for b in right {
            let mut cube: Cube = a.iter().chain(b).copied().collect();
            cube.sort_unstable();
            cube.dedup();
            // A pin both ways makes the row empty.
            if cube.windows(2).all(|pair| pair[0].0 != pair[1].0) {
                cubes.push(cube);
            }
        }
    }
    bounded(cubes)
}

fn bounded(mut cubes: Vec<Cube>) -> Option<Vec<Cube>> {
    cubes.sort_unstable();
    cubes.dedup();
    (cubes.len() <= MOST_CUBES).then_some(cubes)
}
