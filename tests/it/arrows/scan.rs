//! A Rust source file as words and signs, without comments, texts and test code.
//!
//! Just enough of the language to read paths off; anything it cannot read shows up as an unknown path.

/// An identifier or one sign; `::` is one token.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Token {
    pub text: String,
    pub line: usize,
}

/// A file's tokens outside test code, and the modules it declares for tests only.
pub struct Scanned {
    pub tokens: Vec<Token>,
    pub test_modules: Vec<String>,
}

pub fn scan(source: &str) -> Scanned {
    let mut tokens = tokenise(source);
    let mut test_modules = Vec::new();
    while let Some(start) = find(&tokens, &["#", "[", "cfg", "(", "test", ")", "]"]) {
        let end = end_of_item(&tokens, start + 7);
        let item = &tokens[start + 7..end];
        if let Some(at) = item.iter().position(|token| token.text == "mod")
            && item.get(at + 2).is_some_and(|token| token.text == ";")
        {
            test_modules.push(item[at + 1].text.clone());
        }
        tokens.drain(start..end);
    }
    Scanned {
        tokens,
        test_modules,
    }
}

fn find(tokens: &[Token], words: &[&str]) -> Option<usize> {
    tokens.windows(words.len()).position(|window| {
        window
            .iter()
            .zip(words)
            .all(|(token, word)| token.text == *word)
    })
}

/// Where the item that begins at `start` ends: after its `;`, or after the brace that closes its body.
fn end_of_item(tokens: &[Token], start: usize) -> usize {
    let mut depth = 0;
    for (offset, token) in tokens[start..].iter().enumerate() {
        match token.text.as_str() {
            "{" | "(" | "[" => depth += 1,
            "}" | ")" | "]" => depth -= 1,
            _ => {}
        }
        // Braces of a `use` tree are followed by its semicolon.
        let is_use_tree = tokens
            .get(start + offset + 1)
            .is_some_and(|next| next.text == ";");
        if depth == 0 && (token.text == ";" || (token.text == "}" && !is_use_tree)) {
            return start + offset + 1;
        }
    }
    tokens.len()
}

fn tokenise(source: &str) -> Vec<Token> {
    let chars: Vec<char> = source.chars().collect();
    let mut tokens = Vec::new();
    let (mut at, mut line) = (0, 1);
    while at < chars.len() {
        let start = at;
        let rest = &chars[at..];
        let text = match rest {
            ['/', '/', ..] => {
                at += rest.iter().position(|c| *c == '\n').unwrap_or(rest.len());
                None
            }
            ['/', '*', ..] => {
                at += block_comment(rest);
                None
            }
            ['r', '"', ..] | ['r', '#', '"' | '#', ..] => {
                at += raw_text(&rest[1..]) + 1;
                None
            }
            ['b', 'r', '"' | '#', ..] => {
                at += raw_text(&rest[2..]) + 2;
                None
            }
            ['"', ..] => {
                at += quoted(rest, '"');
                None
            }
            ['\'', '\\', ..] | ['\'', _, '\'', ..] => {
                at += quoted(rest, '\'');
                None
            }
            [':', ':', ..] => {
                at += 2;
                Some("::".to_owned())
            }
            [first, ..] if first.is_alphabetic() || *first == '_' => {
                let length = rest
                    .iter()
                    .take_while(|c| c.is_alphanumeric() || **c == '_')
                    .count();
                at += length;
                Some(rest[..length].iter().collect())
            }
            // Numbers are one token, so that the suffix of `1.0_f64` is no name.
            [first, ..] if first.is_ascii_digit() => {
                at += rest
                    .iter()
                    .take_while(|c| c.is_ascii_alphanumeric() || **c == '_')
                    .count();
                Some("0".to_owned())
            }
            [first, ..] => {
                at += 1;
                (!first.is_whitespace()).then(|| first.to_string())
            }
            [] => None,
        };
        if let Some(text) = text {
            tokens.push(Token { text, line });
        }
        line += chars[start..at].iter().filter(|c| **c == '\n').count();
    }
    tokens
}

/// Length of the block comment at the start of `rest`; they nest.
fn block_comment(rest: &[char]) -> usize {
    let (mut depth, mut at) = (0, 0);
    while at < rest.len() {
        match &rest[at..] {
            ['/', '*', ..] => {
                depth += 1;
                at += 2;
            }
            ['*', '/', ..] => {
                depth -= 1;
                at += 2;
                if depth == 0 {
                    break;
                }
            }
            _ => at += 1,
        }
    }
    at
}

/// Length of `"…"` or `#"…"#`.
fn raw_text(rest: &[char]) -> usize {
    let hashes = rest.iter().take_while(|c| **c == '#').count();
    if rest.get(hashes) != Some(&'"') {
        // A raw identifier.
        return hashes;
    }
    let closes = |at: &usize| {
        rest[*at] == '"'
            && rest[at + 1..]
                .iter()
                .take(hashes)
                .filter(|c| **c == '#')
                .count()
                == hashes
    };
    (hashes + 1..rest.len())
        .find(closes)
        .map_or(rest.len(), |at| at + 1 + hashes)
}

/// Length of a text or character in the quotes that it begins with.
fn quoted(rest: &[char], quote: char) -> usize {
    let mut at = 1;
    while at < rest.len() {
        match rest[at] {
            '\\' => at += 2,
            c if c == quote => return at + 1,
            _ => at += 1,
        }
    }
    rest.len()
}

/// Paths that begin at `root` (a word followed by `::`), as segments and line, use trees spread out.
pub fn paths_after(tokens: &[Token], root: usize) -> Vec<(Vec<String>, usize)> {
    let mut found = Vec::new();
    spread(tokens, root + 2, &[], &mut found);
    found
}

/// Follows segments from `at`; returns where the path or its tree ends.
fn spread(
    tokens: &[Token],
    mut at: usize,
    before: &[String],
    found: &mut Vec<(Vec<String>, usize)>,
) -> usize {
    let mut segments = before.to_vec();
    while let Some(token) = tokens.get(at) {
        if token.text == "{" {
            at += 1;
            while let Some(token) = tokens.get(at) {
                match token.text.as_str() {
                    "}" => return at + 1,
                    "," => at += 1,
                    _ => {
                        let next = spread(tokens, at, &segments, found);
                        at = skip_alias(tokens, next);
                    }
                }
            }
            return at;
        }
        segments.push(token.text.clone());
        let line = token.line;
        let is_followed = tokens.get(at + 1).is_some_and(|next| next.text == "::");
        let is_generic = tokens.get(at + 2).is_some_and(|next| next.text == "<");
        at += 1;
        if !is_followed || is_generic {
            found.push((segments, line));
            return at;
        }
        at += 1;
    }
    at
}

fn skip_alias(tokens: &[Token], at: usize) -> usize {
    if tokens.get(at).is_some_and(|token| token.text == "as") {
        at + 2
    } else {
        at
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn words(source: &str) -> String {
        scan(source)
            .tokens
            .iter()
            .map(|token| token.text.as_str())
            .collect::<Vec<_>>()
            .join(" ")
    }

    #[test]
    fn hand_comments_texts_and_tests_are_no_code() {
        assert_eq!(words("a /* crate::b /* c */ */ d // crate::e\nf"), "a d f");
        assert_eq!(
            words(r##"let x = "crate::b \" c"; y(r#"crate::"d"#, 'e', '\'', 'life)"##),
            "let x = ; y ( , , , ' life )"
        );
        assert_eq!(
            words("a\n#[cfg(test)]\nmod tests { use crate::b; fn c() { d[1]; } }\ne"),
            "a e"
        );
        assert_eq!(words("#[cfg(test)]\npub(super) use b::{c, d};\ne"), "e");
        assert_eq!(
            words("#[cfg(test)]\nfn b(x: &[u8]) -> [u8; 3] { c() }\ne"),
            "e"
        );
        assert_eq!(
            scan("#[cfg(test)] mod sample;\n#[cfg(test)]\nmod tests;").test_modules,
            ["sample", "tests"]
        );
    }

    #[test]
    fn hand_paths_of_a_use_tree() {
        let scanned = scan("use crate::{a::{self, b as x}, c::D, e};\nf(crate::g::h::<u8>());");
        let roots: Vec<usize> = (0..scanned.tokens.len())
            .filter(|at| scanned.tokens[*at].text == "crate")
            .collect();
        let paths: Vec<(String, usize)> = roots
            .iter()
            .flat_map(|root| paths_after(&scanned.tokens, *root))
            .map(|(path, line)| (path.join("::"), line))
            .collect();
        let expected = [
            ("a::self", 1),
            ("a::b", 1),
            ("c::D", 1),
            ("e", 1),
            ("g::h", 2),
        ];
        assert_eq!(paths, expected.map(|(path, line)| (path.to_owned(), line)));
    }
}
