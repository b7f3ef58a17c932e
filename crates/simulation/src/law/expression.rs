//! A small language of ordinary maths for densities typed as text.
//!
//! ```text
//! sum     = term { ("+" | "-") term }
//! term    = factor { ("*" | "/") factor }
//! factor  = ["-" | "+"] factor | power
//! power   = atom [ "^" factor ]            right associative: 2^3^2 = 2^9, -x^2 = -(x^2)
//! atom    = number | "x" | "pi" | "e" | name "(" sum ")" | "(" sum ")"
//! name    = exp, ln, log (natural), sqrt, abs, sin, cos
//! ```
//!
//! Products need their `*`. Numbers are written as usual (`2`, `.5`, `1.5e-3`).

use num_complex::Complex64;

/// A parsed expression in `x`.
#[derive(Debug, Clone, PartialEq)]
pub(crate) enum Expression {
    Number(f64),
    X,
    Negate(Box<Expression>),
    Binary(Operator, Box<Expression>, Box<Expression>),
    Call(Function, Box<Expression>),
}

/// An operator between two expressions.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Operator {
    Add,
    Subtract,
    Multiply,
    Divide,
    Power,
}

/// A function of one expression.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Function {
    Exp,
    Ln,
    Sqrt,
    Abs,
    Sin,
    Cos,
}

/// Deepest nesting and longest text, so that no input exhausts the stack.
const DEEPEST: usize = 100;
const LONGEST: usize = 4096;

impl Expression {
    /// Reads an expression, or says what was expected at which character (counted from 1).
    pub(crate) fn parse(text: &str) -> Result<Self, String> {
        if text.len() > LONGEST {
            return Err(format!("must be at most {LONGEST} characters long (got {})", text.len()));
        }
        let mut parser = Parser { characters: text.chars().collect(), at: 0, depth: 0 };
        let expression = parser.sum()?;
        parser.skip_spaces();
        if parser.at < parser.characters.len() {
            return Err(parser.expected("an operator"));
        }
        Ok(expression)
    }

    /// The value at a real x; may be infinite or `NaN` where the expression is undefined.
    pub(crate) fn at(&self, x: f64) -> f64 {
        match self {
            Self::Number(value) => *value,
            Self::X => x,
            Self::Negate(inner) => -inner.at(x),
            Self::Binary(operator, left, right) => {
                let (a, b) = (left.at(x), right.at(x));
                match operator {
                    Operator::Add => a + b,
                    Operator::Subtract => a - b,
                    Operator::Multiply => a * b,
                    Operator::Divide => a / b,
                    Operator::Power => a.powf(b),
                }
            }
            Self::Call(function, inner) => {
                let a = inner.at(x);
                match function {
                    Function::Exp => a.exp(),
                    Function::Ln => a.ln(),
                    Function::Sqrt => a.sqrt(),
                    Function::Abs => a.abs(),
                    Function::Sin => a.sin(),
                    Function::Cos => a.cos(),
                }
            }
        }
    }

    /// Analytic continuation to complex z from the stretch that contains the real point `near`: `abs` keeps
    /// the sign its argument has there.
    pub(crate) fn at_complex(&self, z: Complex64, near: f64) -> Complex64 {
        match self {
            Self::Number(value) => Complex64::new(*value, 0.0),
            Self::X => z,
            Self::Negate(inner) => -inner.at_complex(z, near),
            Self::Binary(operator, left, right) => {
                let (a, b) = (left.at_complex(z, near), right.at_complex(z, near));
                match operator {
                    Operator::Add => a + b,
                    Operator::Subtract => a - b,
                    Operator::Multiply => a * b,
                    Operator::Divide => a / b,
                    Operator::Power => match **right {
                        // Whole powers are entire (or meromorphic): no logarithm and no cut.
                        Self::Number(power) if power == power.trunc() && power.abs() < 1e3 => {
                            a.powi(power as i32)
                        }
                        _ => (b * a.ln()).exp(),
                    },
                }
            }
            Self::Call(function, inner) => {
                let a = inner.at_complex(z, near);
                match function {
                    Function::Exp => a.exp(),
                    Function::Ln => a.ln(),
                    Function::Sqrt => a.sqrt(),
                    Function::Abs => {
                        if inner.at(near) < 0.0 {
                            -a
                        } else {
                            a
                        }
                    }
                    Function::Sin => a.sin(),
                    Function::Cos => a.cos(),
                }
            }
        }
    }
}

struct Parser {
    characters: Vec<char>,
    at: usize,
    depth: usize,
}

impl Parser {
    fn skip_spaces(&mut self) {
        while self.characters.get(self.at).is_some_and(|c| c.is_whitespace()) {
            self.at += 1;
        }
    }

    fn peek(&mut self) -> Option<char> {
        self.skip_spaces();
        self.characters.get(self.at).copied()
    }

    fn take(&mut self, wanted: char) -> bool {
        let found = self.peek() == Some(wanted);
        self.at += usize::from(found);
        found
    }

    fn expected(&self, what: &str) -> String {
        match self.characters.get(self.at) {
            Some(found) => format!("expected {what} at character {} (got `{found}`)", self.at + 1),
            None => format!("expected {what} at the end"),
        }
    }

    fn sum(&mut self) -> Result<Expression, String> {
        self.depth += 1;
        if self.depth > DEEPEST {
            return Err(format!("must not be nested more than {DEEPEST} deep"));
        }
        let mut left = self.term()?;
        loop {
            let operator = match self.peek() {
                Some('+') => Operator::Add,
                Some('-') => Operator::Subtract,
                _ => break,
            };
            self.at += 1;
            left = Expression::Binary(operator, Box::new(left), Box::new(self.term()?));
        }
        self.depth -= 1;
        Ok(left)
    }

    fn term(&mut self) -> Result<Expression, String> {
        let mut left = self.factor()?;
        loop {
            let operator = match self.peek() {
                Some('*') => Operator::Multiply,
                Some('/') => Operator::Divide,
                _ => return Ok(left),
            };
            self.at += 1;
            left = Expression::Binary(operator, Box::new(left), Box::new(self.factor()?));
        }
    }

    fn factor(&mut self) -> Result<Expression, String> {
        self.depth += 1;
        if self.depth > DEEPEST {
            return Err(format!("must not be nested more than {DEEPEST} deep"));
        }
        let result = if self.take('-') {
            Expression::Negate(Box::new(self.factor()?))
        } else if self.take('+') {
            self.factor()?
        } else {
            let base = self.atom()?;
            if self.take('^') {
                Expression::Binary(Operator::Power, Box::new(base), Box::new(self.factor()?))
            } else {
                base
            }
        };
        self.depth -= 1;
        Ok(result)
    }

    fn atom(&mut self) -> Result<Expression, String> {
        match self.peek() {
            Some('(') => {
                self.at += 1;
                self.closed()
            }
            Some(c) if c.is_ascii_digit() || c == '.' => self.number(),
            Some(c) if c.is_alphabetic() => self.name(),
            _ => Err(self.expected("a number, `x`, a function or `(`")),
        }
    }

    fn closed(&mut self) -> Result<Expression, String> {
        let inner = self.sum()?;
        if self.take(')') { Ok(inner) } else { Err(self.expected("`)`")) }
    }

    fn number(&mut self) -> Result<Expression, String> {
        let start = self.at;
        let digit = |c: Option<&char>| c.is_some_and(char::is_ascii_digit);
        while digit(self.characters.get(self.at)) || self.characters.get(self.at) == Some(&'.') {
            self.at += 1;
        }
        // An exponent, only where digits follow: `2e` alone would be 2 times e, which needs a `*`.
        if matches!(self.characters.get(self.at), Some('e' | 'E')) {
            let signed = usize::from(matches!(self.characters.get(self.at + 1), Some('+' | '-')));
            if digit(self.characters.get(self.at + 1 + signed)) {
                self.at += 1 + signed;
                while digit(self.characters.get(self.at)) {
                    self.at += 1;
                }
            }
        }
        let text: String = self.characters[start..self.at].iter().collect();
        match text.parse::<f64>() {
            Ok(value) if value.is_finite() => Ok(Expression::Number(value)),
            _ => Err(format!("expected a number at character {} (got `{text}`)", start + 1)),
        }
    }

    fn name(&mut self) -> Result<Expression, String> {
        let start = self.at;
        while self.characters.get(self.at).is_some_and(|c| c.is_alphanumeric() || *c == '_') {
            self.at += 1;
        }
        let text: String = self.characters[start..self.at].iter().collect();
        let function = match text.as_str() {
            "x" => return Ok(Expression::X),
            "pi" => return Ok(Expression::Number(std::f64::consts::PI)),
            "e" => return Ok(Expression::Number(std::f64::consts::E)),
            "exp" => Function::Exp,
            "ln" | "log" => Function::Ln,
            "sqrt" => Function::Sqrt,
            "abs" => Function::Abs,
            "sin" => Function::Sin,
            "cos" => Function::Cos,
            _ => {
                return Err(format!(
                    "unknown name at character {}: expected x, pi, e, exp, ln, log, sqrt, abs, sin or cos (got `{text}`)",
                    start + 1
                ));
            }
        };
        if !self.take('(') {
            return Err(self.expected(&format!("`(` after `{text}`")));
        }
        Ok(Expression::Call(function, Box::new(self.closed()?)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn precedence_and_functions() {
        for (text, x, value) in [
            ("1 + 2*3^2", 0.0, 19.0),
            ("-x^2", 3.0, -9.0),
            ("2^3^2", 0.0, 512.0),
            ("2^-1", 0.0, 0.5),
            ("(1+x)*(1-x)", 0.5, 0.75),
            ("exp(-x/2) / sqrt(4)", 0.0, 0.5),
            ("abs(x) + ln(e) + log(1) + cos(0) + sin(pi)*0", -2.0, 4.0),
            ("1.5e-3 + .5 + 2E2", 0.0, 200.5015),
            ("6/3/2", 0.0, 1.0),
            ("--x - -x", 2.0, 4.0),
        ] {
            assert_eq!(Expression::parse(text).unwrap().at(x), value, "{text}");
        }
    }

    #[test]
    fn complex_values_continue_the_real_ones() {
        for text in ["exp(-x^2)*(1+sin(x))", "x^0.5/(1+x^3)", "ln(1+x)*abs(x-5)+sqrt(x)*cos(x)"] {
            let expression = Expression::parse(text).unwrap();
            for x in [0.3, 1.0, 2.7] {
                let real = expression.at(x);
                let there = expression.at_complex(Complex64::new(x, 0.0), x);
                assert!((there.re - real).abs() < 1e-14 && there.im.abs() < 1e-14, "{text} at {x}");
                // Cauchy–Riemann: the derivative along i is i times the one along 1.
                let h = 1e-5;
                let along = (expression.at(x + h) - expression.at(x - h)) / (2.0 * h);
                let up = (expression.at_complex(Complex64::new(x, h), x)
                    - expression.at_complex(Complex64::new(x, -h), x))
                    / (2.0 * h);
                assert!((up - Complex64::new(0.0, along)).norm() < 1e-8, "{text} at {x}");
            }
        }
    }

    #[test]
    fn mistakes_are_placed() {
        for (text, message) in [
            ("2x", "expected an operator at character 2 (got `x`)"),
            ("exp(-x", "expected `)` at the end"),
            ("sin x", "expected `(` after `sin` at character 5 (got `x`)"),
            (
                "y+1",
                "unknown name at character 1: expected x, pi, e, exp, ln, log, sqrt, abs, sin or cos (got `y`)",
            ),
            ("1.2.3", "expected a number at character 1 (got `1.2.3`)"),
            ("", "expected a number, `x`, a function or `(` at the end"),
        ] {
            assert_eq!(Expression::parse(text).unwrap_err(), message, "{text}");
        }
        assert!(Expression::parse(&"(".repeat(4000)).is_err());
        assert!(Expression::parse(&"-".repeat(4000)).is_err());
        // Left-associated chains must not overflow the stack either.
        assert!(Expression::parse(&"1+".repeat(2000)).is_err());
        let chain = format!("{}1", "1+".repeat(2000));
        assert_eq!(Expression::parse(&chain).unwrap().at(0.0), 2001.0);
    }
}
