//! Text to tree. The only file that names evalexpr, and only its parser.
//!
//! The crate's own reading of literals, names and powers is full of traps (`1/2` is 0, `x y` is a call,
//! `2^3^2` associates left, no error has a position). So an own lexer checks the text first and hands the
//! crate nothing but numbered operands: `(q - 1)/A` goes over as `(v1 - v3)/v6`, each number the index of a
//! token, from which literal, name and position are looked up again.

use std::ops::Range;

use evalexpr::{Node, Operator};

use super::Fault;
use super::tree::{Binary, Comparison, Function, Kind, ProbeFunction, Tree};
use crate::diagnostic::{
    BAD_ARGUMENT, BAD_CHARACTER, BAD_NUMBER, FORMULA_TOO_LONG, POWER_CHAIN, SYNTAX, WRONG_ARITY,
};

/// Longest formula, in bytes.
pub const MAX_LENGTH: usize = 4096;
/// Most operators of a formula: each may deepen the tree by one, and its depth bounds the stack.
pub const MAX_OPERATORS: usize = 400;
/// Deepest nesting of parentheses.
pub const MAX_DEPTH: usize = 64;

/// Reads a formula.
///
/// # Errors
/// One or more [`Fault`]s with positions in `text`: a character, number or arrangement that is not a formula.
pub fn parse(text: &str) -> Result<Tree, Vec<Fault>> {
    if text.len() > MAX_LENGTH {
        let message = format!(
            "the formula has {} bytes; the limit is {MAX_LENGTH}",
            text.len()
        );
        return Err(vec![Fault::new(
            &FORMULA_TOO_LONG,
            0..text.len(),
            message,
            "split it into named quantities",
        )]);
    }
    let tokens = lex(text)?;
    check(text, &tokens)?;
    let renamed = rename(&tokens);
    let unreadable = || {
        vec![Fault::new(
            &SYNTAX,
            0..text.len(),
            "this cannot be read as a formula",
            "write it with + - * / ^, parentheses and functions",
        )]
    };
    let node = evalexpr::build_operator_tree(&renamed).map_err(|_| unreadable())?;
    let mut faults = Vec::new();
    let tree = Lowering {
        tokens: &tokens,
        faults: &mut faults,
    }
    .lower(&node);
    match (tree, faults.is_empty()) {
        (Some(tree), true) => Ok(tree),
        (_, false) => Err(faults),
        (None, true) => Err(unreadable()),
    }
}

#[derive(Clone, Debug, PartialEq)]
enum TokenKind {
    Number(f64),
    Name(String),
    /// A quoted unit.
    Quoted(String),
    Operator(&'static str),
    Open,
    Close,
    Comma,
}

#[derive(Clone, Debug)]
struct Token {
    kind: TokenKind,
    span: Range<usize>,
}

/// Longest first, so that `<=` is not read as `<`.
const OPERATORS: &[&str] = &[
    "<=", ">=", "==", "!=", "&&", "||", "+", "-", "*", "/", "^", "<", ">", "!",
];

fn lex(text: &str) -> Result<Vec<Token>, Vec<Fault>> {
    let bytes = text.as_bytes();
    let mut tokens = Vec::new();
    let mut faults = Vec::new();
    let mut at = 0;
    while at < bytes.len() {
        let byte = bytes[at];
        let start = at;
        if byte.is_ascii_whitespace() {
            at += 1;
        } else if byte.is_ascii_digit()
            || (byte == b'.' && bytes.get(at + 1).is_some_and(u8::is_ascii_digit))
        {
            at = number_end(bytes, at);
            match read_number(&text[start..at], start..at) {
                Ok(value) => tokens.push(Token {
                    kind: TokenKind::Number(value),
                    span: start..at,
                }),
                Err(fault) => faults.push(fault),
            }
        } else if byte.is_ascii_alphabetic() {
            while at < bytes.len() && (bytes[at].is_ascii_alphanumeric() || bytes[at] == b'_') {
                at += 1;
            }
            tokens.push(Token {
                kind: TokenKind::Name(text[start..at].to_owned()),
                span: start..at,
            });
        } else if byte == b'"' {
            match text[at + 1..].find('"') {
                Some(length) => {
                    at += length + 2;
                    tokens.push(Token {
                        kind: TokenKind::Quoted(text[start + 1..at - 1].to_owned()),
                        span: start..at,
                    });
                }
                None => {
                    faults.push(Fault::new(
                        &SYNTAX,
                        at..text.len(),
                        "the quoted unit does not end",
                        "close it with a quotation mark",
                    ));
                    at = bytes.len();
                }
            }
        } else if let Some(kind) = punctuation(byte) {
            at += 1;
            tokens.push(Token {
                kind,
                span: start..at,
            });
        } else if let Some(operator) = OPERATORS
            .iter()
            .find(|operator| text[at..].starts_with(**operator))
        {
            at += operator.len();
            tokens.push(Token {
                kind: TokenKind::Operator(operator),
                span: start..at,
            });
        } else {
            let character = text[at..].chars().next().unwrap_or(' ');
            at += character.len_utf8();
            faults.push(bad_character(character, start..at));
        }
    }
    if faults.is_empty() {
        Ok(tokens)
    } else {
        Err(faults)
    }
}

fn punctuation(byte: u8) -> Option<TokenKind> {
    match byte {
        b'(' => Some(TokenKind::Open),
        b')' => Some(TokenKind::Close),
        b',' => Some(TokenKind::Comma),
        _ => None,
    }
}

/// End of the literal that starts at `at`: everything that could be meant as part of it, so that `1_000` or `0x10` is one fault.
fn number_end(bytes: &[u8], mut at: usize) -> usize {
    let start = at;
    while at < bytes.len() {
        // A sign belongs to the literal only right behind the e of a decimal number.
        let exponent_sign = matches!(bytes[at], b'+' | b'-')
            && at >= start + 2
            && matches!(bytes[at - 1], b'e' | b'E')
            && bytes[start..at - 1]
                .iter()
                .all(|byte| byte.is_ascii_digit() || *byte == b'.');
        if bytes[at].is_ascii_alphanumeric() || matches!(bytes[at], b'.' | b'_') || exponent_sign {
            at += 1;
        } else {
            break;
        }
    }
    at
}

fn read_number(text: &str, span: Range<usize>) -> Result<f64, Fault> {
    let unreadable = |mend: &str| {
        Fault::new(
            &BAD_NUMBER,
            span.clone(),
            format!("`{text}` is not a number"),
            mend,
        )
    };
    if text.contains('_') {
        return Err(unreadable("write the digits without underscores"));
    }
    if text.starts_with("0x") || text.starts_with("0X") {
        return Err(unreadable("write a decimal number"));
    }
    let mantissa = text.find(['e', 'E']).map_or(text, |at| &text[..at]);
    if let Some(at) = mantissa.find(|c: char| c.is_ascii_alphabetic()) {
        return Err(unreadable(&format!(
            "write the product with a star: {} * {}",
            &text[..at],
            &text[at..]
        )));
    }
    match text.parse::<f64>() {
        Ok(value) if value.is_finite() => Ok(value),
        Ok(_) => Err(Fault::new(
            &BAD_NUMBER,
            span,
            format!("`{text}` is too large for a 64-bit float"),
            "the largest is about 1.8e308",
        )),
        Err(_) => Err(unreadable("write it like 12, 0.5 or 1.2e-3")),
    }
}

fn bad_character(character: char, span: Range<usize>) -> Fault {
    let mend = match character {
        '−' | '–' | '—' => "write the minus sign of the keyboard: -",
        '·' | '×' | '⋅' => "write the product with a star: *",
        '÷' => "write the quotient with a slash: /",
        '²' | '³' => "write the power with a caret: ^2",
        '%' => "write the share as a number, or a quantity \"5 %\" as an input",
        '=' => "a formula assigns nothing; comparisons are written < <= > >= == !=",
        '[' | ']' | '{' | '}' => "use round parentheses",
        '&' => "both conditions: write &&",
        '|' => "either condition: write ||; magnitude: write abs(x)",
        '_' => "a symbol begins with a letter",
        ';' | ':' | '#' | '\'' | '\\' => "a formula is one expression",
        _ => "symbols are written with a-z, A-Z, 0-9 and _, Greek letters by name: rho_w",
    };
    Fault::new(
        &BAD_CHARACTER,
        span,
        format!("`{}` cannot stand in a formula", character.escape_debug()),
        mend,
    )
}

/// Checks that operands and operators alternate as in a formula, so that the crate sees nothing that it would misread.
fn check(text: &str, tokens: &[Token]) -> Result<(), Vec<Fault>> {
    let fault = |span: Range<usize>, message: &str, mend: &str| {
        Err(vec![Fault::new(&SYNTAX, span, message, mend)])
    };
    if tokens.is_empty() {
        return fault(0..text.len(), "the formula is empty", "write an expression");
    }
    // For each open parenthesis: whether it encloses arguments of a call.
    let mut open: Vec<(bool, Range<usize>)> = Vec::new();
    let operators = || {
        tokens
            .iter()
            .filter(|token| matches!(token.kind, TokenKind::Operator(_)))
    };
    if let Some(one_too_many) = operators().nth(MAX_OPERATORS) {
        let message = format!(
            "{} operators; the limit is {MAX_OPERATORS}",
            operators().count()
        );
        return Err(vec![Fault::new(
            &FORMULA_TOO_LONG,
            one_too_many.span.clone(),
            message,
            "split the formula into named quantities",
        )]);
    }
    let mut expects_operand = true;
    for (index, token) in tokens.iter().enumerate() {
        let span = token.span.clone();
        let after_name = index > 0 && matches!(tokens[index - 1].kind, TokenKind::Name(_));
        match &token.kind {
            TokenKind::Number(_) | TokenKind::Name(_) | TokenKind::Quoted(_) => {
                if !expects_operand {
                    return fault(
                        span,
                        "an operator is missing before this",
                        "products are written with a star: a * b",
                    );
                }
                expects_operand = false;
            }
            TokenKind::Open => {
                if !expects_operand && !after_name {
                    return fault(
                        span,
                        "an operator is missing before the parenthesis",
                        "products are written with a star: 2 * (a + b)",
                    );
                }
                open.push((!expects_operand, span.clone()));
                if open.len() > MAX_DEPTH {
                    let message = format!("parentheses nest deeper than {MAX_DEPTH}");
                    return Err(vec![Fault::new(
                        &FORMULA_TOO_LONG,
                        span,
                        message,
                        "split the formula into named quantities",
                    )]);
                }
                expects_operand = true;
            }
            TokenKind::Close => {
                if open.pop().is_none() {
                    return fault(span, "this parenthesis closes nothing", "remove it");
                }
                if expects_operand {
                    return fault(
                        span,
                        "an operand is missing before the parenthesis",
                        "add the operand, or remove the operator",
                    );
                }
            }
            TokenKind::Comma => {
                if expects_operand || !open.last().is_some_and(|(is_call, _)| *is_call) {
                    return fault(
                        span,
                        "a comma separates arguments of a function; here it separates nothing",
                        "the decimal sign is a point",
                    );
                }
                expects_operand = true;
            }
            TokenKind::Operator("!") => {
                if !expects_operand {
                    return fault(
                        span,
                        "an operator is missing before `!`",
                        "not equal is written !=",
                    );
                }
            }
            TokenKind::Operator("-") if expects_operand => {
                if index > 0 && matches!(tokens[index - 1].kind, TokenKind::Operator("-")) {
                    return fault(
                        span,
                        "two minus signs in a row",
                        "use parentheses if both are meant: a - (-b)",
                    );
                }
            }
            TokenKind::Operator(operator) => {
                if expects_operand {
                    let message = format!("an operand is missing before `{operator}`");
                    let mend = if *operator == "+" {
                        "a leading plus sign is not needed"
                    } else {
                        "add the operand; a power is written a^b"
                    };
                    return fault(span, &message, mend);
                }
                expects_operand = true;
            }
        }
    }
    if let Some((_, span)) = open.pop() {
        return fault(span, "this parenthesis is never closed", "close it");
    }
    if expects_operand {
        let last = tokens[tokens.len() - 1].span.clone();
        return fault(
            last,
            "the formula ends where an operand is expected",
            "add the operand, or remove the operator",
        );
    }
    check_chains(tokens)
}

/// Refuses `a^b^c` and `a < b < c`, which people read in two ways.
fn check_chains(tokens: &[Token]) -> Result<(), Vec<Fault>> {
    for (index, token) in tokens.iter().enumerate() {
        if matches!(token.kind, TokenKind::Operator("^")) {
            let end = primary_end(tokens, index + 1);
            if let Some(next) = tokens
                .get(end)
                .filter(|next| matches!(next.kind, TokenKind::Operator("^")))
            {
                let mend = "write (a^b)^c or a^(b^c), whichever is meant";
                return Err(vec![Fault::new(
                    &POWER_CHAIN,
                    token.span.start..next.span.end,
                    "a^b^c can be read in two ways",
                    mend,
                )]);
            }
        }
    }
    // At each depth of parentheses: a comparison since the last && || or comma.
    let mut seen = vec![false];
    for token in tokens {
        let top = seen.len() - 1;
        match &token.kind {
            TokenKind::Open => seen.push(false),
            TokenKind::Close if top > 0 => {
                seen.pop();
            }
            TokenKind::Comma | TokenKind::Operator("&&" | "||") => seen[top] = false,
            TokenKind::Operator("<" | "<=" | ">" | ">=" | "==" | "!=") => {
                if seen[top] {
                    let message = "comparisons in a chain";
                    return Err(vec![Fault::new(
                        &SYNTAX,
                        token.span.clone(),
                        message,
                        "write a < b && b < c",
                    )]);
                }
                seen[top] = true;
            }
            _ => {}
        }
    }
    Ok(())
}

/// Index after the operand (with its unary minus) that starts at `index`.
fn primary_end(tokens: &[Token], mut index: usize) -> usize {
    if tokens
        .get(index)
        .is_some_and(|token| matches!(token.kind, TokenKind::Operator("-")))
    {
        index += 1;
    }
    if tokens
        .get(index)
        .is_some_and(|token| matches!(token.kind, TokenKind::Name(_)))
    {
        index += 1;
    }
    if tokens
        .get(index)
        .is_some_and(|token| token.kind == TokenKind::Open)
    {
        let mut depth = 0;
        while let Some(token) = tokens.get(index) {
            index += 1;
            match token.kind {
                TokenKind::Open => depth += 1,
                TokenKind::Close => depth -= 1,
                _ => {}
            }
            if depth == 0 {
                break;
            }
        }
        return index;
    }
    let after_name = matches!(
        tokens.get(index.wrapping_sub(1)).map(|token| &token.kind),
        Some(TokenKind::Name(_))
    );
    if after_name { index } else { index + 1 }
}

/// The text that the crate parses: operands by token number, negative exponents in parentheses.
fn rename(tokens: &[Token]) -> String {
    let mut text = String::new();
    let mut close_after: Vec<usize> = Vec::new();
    for (index, token) in tokens.iter().enumerate() {
        let negative_exponent = matches!(token.kind, TokenKind::Operator("-"))
            && index > 0
            && matches!(tokens[index - 1].kind, TokenKind::Operator("^"));
        if negative_exponent {
            text.push('(');
            close_after.push(primary_end(tokens, index));
        }
        match &token.kind {
            TokenKind::Number(_) | TokenKind::Name(_) | TokenKind::Quoted(_) => {
                text.push_str(&format!(" v{index} "))
            }
            TokenKind::Operator(operator) => text.push_str(&format!(" {operator} ")),
            TokenKind::Open => text.push('('),
            TokenKind::Close => text.push(')'),
            TokenKind::Comma => text.push(','),
        }
        while close_after.last() == Some(&(index + 1)) {
            close_after.pop();
            text.push(')');
        }
    }
    text
}

/// The crate's tree into ours.
struct Lowering<'a> {
    tokens: &'a [Token],
    faults: &'a mut Vec<Fault>,
}

impl Lowering<'_> {
    fn lower(&mut self, node: &Node) -> Option<Tree> {
        match node.operator() {
            Operator::RootNode => self.lower(node.children().first()?),
            Operator::Add => self.binary(Binary::Add, node),
            Operator::Sub => self.binary(Binary::Subtract, node),
            Operator::Mul => self.binary(Binary::Multiply, node),
            Operator::Div => self.binary(Binary::Divide, node),
            Operator::Exp => self.binary(Binary::Power, node),
            Operator::Neg => self.unary(node, Kind::Negate),
            Operator::Not => self.unary(node, Kind::Not),
            Operator::Eq => self.pair(node, |a, b| Kind::Compare(Comparison::Equal, a, b)),
            Operator::Neq => self.pair(node, |a, b| Kind::Compare(Comparison::NotEqual, a, b)),
            Operator::Lt => self.pair(node, |a, b| Kind::Compare(Comparison::Less, a, b)),
            Operator::Leq => self.pair(node, |a, b| Kind::Compare(Comparison::LessOrEqual, a, b)),
            Operator::Gt => self.pair(node, |a, b| Kind::Compare(Comparison::Greater, a, b)),
            Operator::Geq => {
                self.pair(node, |a, b| Kind::Compare(Comparison::GreaterOrEqual, a, b))
            }
            Operator::And => self.pair(node, Kind::And),
            Operator::Or => self.pair(node, Kind::Or),
            Operator::VariableIdentifierRead { identifier } => self.operand(identifier),
            Operator::FunctionIdentifier { identifier } => {
                self.call(identifier, node.children().first()?)
            }
            // Nothing else can come out of the checked text.
            _ => None,
        }
    }

    fn binary(&mut self, operator: Binary, node: &Node) -> Option<Tree> {
        self.pair(node, |a, b| Kind::Binary(operator, a, b))
    }

    fn unary(&mut self, node: &Node, kind: impl FnOnce(Box<Tree>) -> Kind) -> Option<Tree> {
        let child = self.lower(node.children().first()?)?;
        let span = child.span.start.saturating_sub(1)..child.span.end;
        Some(Tree::new(kind(Box::new(child)), span))
    }

    fn pair(
        &mut self,
        node: &Node,
        kind: impl FnOnce(Box<Tree>, Box<Tree>) -> Kind,
    ) -> Option<Tree> {
        let [left, right] = node.children() else {
            return None;
        };
        let (left, right) = (self.lower(left), self.lower(right));
        let (left, right) = (left?, right?);
        let span = left.span.start..right.span.end;
        Some(Tree::new(kind(Box::new(left), Box::new(right)), span))
    }

    fn token(&self, identifier: &str) -> Option<&Token> {
        self.tokens
            .get(identifier.strip_prefix('v')?.parse::<usize>().ok()?)
    }

    fn operand(&mut self, identifier: &str) -> Option<Tree> {
        let token = self.token(identifier)?.clone();
        match token.kind {
            TokenKind::Number(value) => Some(Tree::new(Kind::Number(value), token.span)),
            TokenKind::Name(name) => Some(Tree::new(Kind::Symbol(name), token.span)),
            TokenKind::Quoted(_) => {
                let mend = "units in quotation marks stand in number_in(x, \"unit\") and measure(number, \"unit\")";
                self.faults.push(Fault::new(
                    &BAD_ARGUMENT,
                    token.span,
                    "quoted text where a number is expected",
                    mend,
                ));
                None
            }
            _ => None,
        }
    }

    fn call(&mut self, identifier: &str, argument: &Node) -> Option<Tree> {
        let token = self.token(identifier)?.clone();
        let TokenKind::Name(name) = token.kind else {
            return None;
        };
        let arguments = argument_nodes(argument);
        let end = self.closing(identifier)?;
        let span = token.span.start..end;
        if name == "number_in" || name == "measure" {
            return self.with_unit(&name, &arguments, span);
        }
        let trees: Option<Vec<Tree>> = arguments.iter().map(|node| self.lower(node)).collect();
        let trees = trees?;
        if name == "if" {
            let [condition, then, otherwise] = self.exactly::<3>(&name, trees, &span)?;
            return Some(Tree::new(
                Kind::If(Box::new(condition), Box::new(then), Box::new(otherwise)),
                span,
            ));
        }
        if let Some(function) = Function::named(&name) {
            self.arity(&name, function.entry().arity, trees.len(), &span)?;
            return Some(Tree::new(Kind::Call(function, trees), span));
        }
        if let Some(function) = ProbeFunction::named(&name) {
            let expected = if function == ProbeFunction::ValueAt {
                2
            } else {
                1
            };
            self.arity(&name, expected, trees.len(), &span)?;
            return Some(Tree::new(Kind::Probe(function, trees), span));
        }
        let [argument] = self.exactly::<1>(&name, trees, &span)?;
        Some(Tree::new(Kind::Lookup(name, Box::new(argument)), span))
    }

    /// Byte after the parenthesis that closes the call whose name is token `identifier`.
    fn closing(&self, identifier: &str) -> Option<usize> {
        let index: usize = identifier.strip_prefix('v')?.parse().ok()?;
        self.tokens
            .get(primary_end(self.tokens, index).checked_sub(1)?)
            .map(|token| token.span.end)
    }

    fn arity(
        &mut self,
        name: &str,
        expected: usize,
        found: usize,
        span: &Range<usize>,
    ) -> Option<()> {
        if expected == found {
            return Some(());
        }
        let plural = if expected == 1 { "" } else { "s" };
        let message = format!("`{name}` takes {expected} argument{plural}, not {found}");
        self.faults.push(Fault::new(
            &WRONG_ARITY,
            span.clone(),
            message,
            "separate arguments with commas; `countermarch functions` lists what each takes",
        ));
        None
    }

    fn exactly<const N: usize>(
        &mut self,
        name: &str,
        trees: Vec<Tree>,
        span: &Range<usize>,
    ) -> Option<[Tree; N]> {
        self.arity(name, N, trees.len(), span)?;
        trees.try_into().ok()
    }

    /// `number_in(x, "unit")` and `measure(number, "unit")`.
    fn with_unit(&mut self, name: &str, arguments: &[&Node], span: Range<usize>) -> Option<Tree> {
        self.arity(name, 2, arguments.len(), &span)?;
        let unit = match unwrapped(arguments[1]).operator() {
            Operator::VariableIdentifierRead { identifier } => {
                match self.token(identifier).map(|token| &token.kind) {
                    Some(TokenKind::Quoted(unit)) => Some(unit.clone()),
                    _ => None,
                }
            }
            _ => None,
        };
        let Some(unit) = unit else {
            let mend = format!("write {name}(…, \"unit\")");
            self.faults.push(Fault::new(
                &BAD_ARGUMENT,
                span,
                format!("the second argument of `{name}` is a unit in quotation marks"),
                mend,
            ));
            return None;
        };
        let value = self.lower(arguments[0])?;
        if name == "number_in" {
            return Some(Tree::new(Kind::NumberIn(Box::new(value), unit), span));
        }
        let number = match &value.kind {
            Kind::Number(number) => Some(*number),
            Kind::Negate(inner) => match inner.kind {
                Kind::Number(number) => Some(-number),
                _ => None,
            },
            _ => None,
        };
        let Some(number) = number else {
            self.faults.push(Fault::new(
                &BAD_ARGUMENT,
                span,
                "the first argument of `measure` is a plain number",
                "write measure(5.7, \"W/(m^2*K)\")",
            ));
            return None;
        };
        Some(Tree::new(Kind::Measure(number, unit), span))
    }
}

/// What a node of parentheses encloses.
fn unwrapped(node: &Node) -> &Node {
    match (node.operator(), node.children()) {
        (Operator::RootNode, [inner]) => unwrapped(inner),
        _ => node,
    }
}

/// The arguments of a call: the crate wraps one in a root node, several in a tuple.
fn argument_nodes(node: &Node) -> Vec<&Node> {
    match node.operator() {
        Operator::RootNode if node.children().len() == 1 => match node.children()[0].operator() {
            Operator::Tuple => argument_nodes(&node.children()[0]),
            _ => vec![node],
        },
        Operator::Tuple => node.children().iter().collect(),
        _ => vec![node],
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn kind(text: &str) -> Kind {
        parse(text)
            .unwrap_or_else(|faults| panic!("{text}: {faults:?}"))
            .kind
    }

    fn code(text: &str) -> &'static str {
        parse(text).expect_err(text)[0].code.id
    }

    #[test]
    fn hand_precedence_and_positions() {
        let tree = parse("a - b * c^2").unwrap();
        let Kind::Binary(Binary::Subtract, a, product) = &tree.kind else {
            panic!("{tree:?}")
        };
        assert_eq!(a.kind, Kind::Symbol("a".into()));
        assert_eq!(product.span, 4..11);
        assert!(
            matches!(kind("-a^b"), Kind::Negate(power) if matches!(power.kind, Kind::Binary(Binary::Power, ..)))
        );
        let Kind::Binary(Binary::Power, _, exponent) = kind("2^-x") else {
            panic!()
        };
        assert!(matches!(exponent.kind, Kind::Negate(_)));
        assert!(
            matches!(kind("1/2"), Kind::Binary(Binary::Divide, a, _) if a.kind == Kind::Number(1.0))
        );
    }

    #[test]
    fn hand_calls_and_spans() {
        let tree = parse("1 + max(h, sqrt(2 * g))").unwrap();
        let Kind::Binary(Binary::Add, _, call) = &tree.kind else {
            panic!()
        };
        assert_eq!(call.span, 4..23);
        let Kind::Call(Function::Max, arguments) = &call.kind else {
            panic!("{call:?}")
        };
        assert_eq!(arguments.len(), 2);
        assert!(matches!(
            kind("if(a > 0 && !(b < c), a, (b))"),
            Kind::If(..)
        ));
        assert!(matches!(kind("eta(q)"), Kind::Lookup(name, _) if name == "eta"));
        assert!(
            matches!(kind("number_in(T, \"degC\")"), Kind::NumberIn(_, unit) if unit == "degC")
        );
        assert!(
            matches!(kind("measure(-5.7e-3, \"W/K\")"), Kind::Measure(value, _) if value == -5.7e-3)
        );
        assert!(matches!(
            kind("value_at(h, time_of(alarm))"),
            Kind::Probe(ProbeFunction::ValueAt, _)
        ));
    }

    #[test]
    fn hand_traps_are_refused_with_their_code() {
        for (text, expected) in [
            ("2^3^2", "F04"),
            ("2^-x^2", "F04"),
            ("a^(b)^c", "F04"),
            ("a//b", "F03"),
            ("a/*b*/", "F03"),
            ("1e400", "F02"),
            ("0x10", "F02"),
            ("1_000", "F02"),
            ("2x", "F02"),
            ("1e -3", "F02"),
            ("x−y", "F01"),
            ("x·y", "F01"),
            ("x[1]", "F01"),
            ("x y", "F03"),
            ("2(3)", "F03"),
            ("a+", "F03"),
            ("+a", "F03"),
            ("2**3", "F03"),
            ("", "F03"),
            ("   ", "F03"),
            ("()", "F03"),
            ("f()", "F03"),
            ("a = 3", "F01"),
            ("a; b", "F01"),
            ("(a, b)", "F03"),
            ("a, b", "F03"),
            ("\"text\"", "F17"),
            ("a < b < c", "F03"),
            ("--a", "F03"),
            ("(a", "F03"),
            ("a)", "F03"),
            ("sqrt(a, b)", "F07"),
            ("max(a)", "F07"),
            ("eta(a, b)", "F07"),
            ("measure(x, \"m\")", "F17"),
            ("number_in(x, m)", "F17"),
            ("a % b", "F01"),
        ] {
            assert_eq!(code(text), expected, "{text}");
        }
    }

    #[test]
    fn hand_limits_hold_without_abort() {
        assert_eq!(code(&"(".repeat(100_000)), "F14");
        assert_eq!(
            code(&format!("{}a{}", "(".repeat(65), ")".repeat(65))),
            "F14"
        );
        assert_eq!(code(&"-".repeat(4000)), "F14");
        let sum = |terms: usize| format!("{}a", "a+".repeat(terms));
        assert!(parse(&sum(MAX_OPERATORS)).is_ok());
        assert_eq!(code(&sum(MAX_OPERATORS + 1)), "F14");
        let denials = |count: usize| format!("{}a", "!".repeat(count));
        assert!(parse(&denials(MAX_OPERATORS)).is_ok_and(|tree| matches!(tree.kind, Kind::Not(_))));
        assert_eq!(code(&denials(MAX_OPERATORS + 1)), "F14");
    }

    #[test]
    fn hand_large_literals_do_not_overflow() {
        assert!(
            matches!(kind("min(1e30, 2e30)"), Kind::Call(Function::Min, list) if list[0].kind == Kind::Number(1e30))
        );
        assert_eq!(kind("1.5e-3"), Kind::Number(1.5e-3));
        assert_eq!(kind(".5"), Kind::Number(0.5));
    }
}
