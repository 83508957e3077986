//! GitHub-flavoured Markdown: the same content as the page file, for reading in any viewer.
//!
//! Text of the user is escaped everywhere, so that no character of it can act as markup.

use super::math::to_latex;
use crate::record::block::{
    Align, Block, Document, Equation, Figure, Heading, Inline, Listing, Notice, RowKind, Signatory,
    Table, Text, Title, Tone,
};

/// The document as Markdown, ending with a line feed.
pub fn write(document: &Document) -> String {
    let mut parts: Vec<String> = Vec::new();
    for block in &document.blocks {
        let part = match block {
            Block::Heading(heading) => self::heading(heading),
            Block::Paragraph(text) => paragraph(text),
            Block::List { ordered, items } => list(*ordered, items),
            Block::Table(table) => self::table(table),
            Block::Figure(figure) => self::figure(figure),
            Block::Equation(equation) => self::equation(equation),
            Block::Listing(listing) => self::listing(listing),
            Block::Title(title) => self::title(title),
            Block::Facts(facts) => {
                let rows = facts
                    .iter()
                    .map(|(label, value)| vec![format!("**{}**", cell(label).trim()), cell(value)]);
                grid(&[String::new(), String::new()], &["---", "---"], rows)
            }
            Block::Notice(notice) => self::notice(notice),
            Block::SignOff(signatories) => sign_off(signatories),
            Block::Checklist(columns) => {
                let column = |column: &crate::record::block::ChecklistColumn| {
                    let boxes = column.items.iter().map(|(ticked, text)| {
                        format!(
                            "- {} {}",
                            if *ticked { "☑" } else { "☐" },
                            inline(text, Place::Line)
                        )
                    });
                    format!(
                        "**{}**\n\n{}",
                        escaped(&column.title),
                        boxes.collect::<Vec<_>>().join("\n")
                    )
                };
                columns.iter().map(column).collect::<Vec<_>>().join("\n\n")
            }
            Block::Contents => contents(&document.blocks),
            Block::PageBreak => "---".to_owned(),
        };
        if !part.is_empty() {
            parts.push(part);
        }
    }
    parts.join("\n\n") + "\n"
}

/// Where text stands: a table cell takes neither a bar nor a line feed.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Place {
    Line,
    Cell,
}

fn heading(heading: &Heading) -> String {
    let marks = "#".repeat(usize::from(heading.level.clamp(1, 5)) + 1);
    let number = if heading.number.is_empty() {
        String::new()
    } else {
        format!("{} ", escaped(&heading.number))
    };
    format!(
        "{}{marks} {number}{}",
        anchor(&heading.anchor),
        escaped(&heading.text)
    )
}

fn paragraph(text: &Text) -> String {
    let line = inline(text, Place::Line);
    guarded(&line)
}

/// Keeps a line of prose from starting a list, a heading, a quotation or a rule.
fn guarded(line: &str) -> String {
    let first = line.chars().next();
    let digits = line.chars().take_while(char::is_ascii_digit).count();
    let numbered = digits > 0 && matches!(line[digits..].chars().next(), Some('.' | ')'));
    match first {
        Some('+' | '-' | '=' | '~') => format!("\\{line}"),
        _ if numbered => format!("{}\\{}", &line[..digits], &line[digits..]),
        _ => line.to_owned(),
    }
}

fn list(ordered: bool, items: &[Text]) -> String {
    let item = |(i, text): (usize, &Text)| {
        let mark = if ordered {
            format!("{}.", i + 1)
        } else {
            "-".to_owned()
        };
        format!("{mark} {}", guarded(&inline(text, Place::Line)))
    };
    items
        .iter()
        .enumerate()
        .map(item)
        .collect::<Vec<_>>()
        .join("\n")
}

fn table(table: &Table) -> String {
    let columns = table.columns.len();
    let heads: Vec<String> = table
        .columns
        .iter()
        .map(|column| cell(&column.heading))
        .collect();
    let aligns: Vec<&str> = table
        .columns
        .iter()
        .map(|column| match column.align {
            Align::Left => ":--",
            Align::Centre => ":-:",
            Align::Right | Align::Decimal => "--:",
        })
        .collect();
    let rows = table.rows.iter().map(|row| {
        let mut cells: Vec<String> = row.cells.iter().map(cell).collect();
        cells.resize(columns.max(1), String::new());
        match row.kind {
            RowKind::Body => {}
            RowKind::Group | RowKind::Strong => cells
                .iter_mut()
                .filter(|c| !c.trim().is_empty())
                .for_each(|c| *c = emphasised(c)),
        }
        cells
    });
    let mut parts = vec![format!(
        "{}{}",
        anchor(&table.anchor),
        caption(&table.label, &table.caption)
    )];
    parts.retain(|part| !part.is_empty());
    parts.push(grid(&heads, &aligns, rows));
    if !table.note.is_empty() {
        parts.push(format!("<sub>{}</sub>", inline(&table.note, Place::Line)));
    }
    parts.join("\n\n")
}

/// Strong text cannot hold strong text: a cell that already has some stays as it is.
fn emphasised(cell: &str) -> String {
    if cell.contains("**") {
        cell.to_owned()
    } else {
        format!("**{}**", cell.trim())
    }
}

fn grid(heads: &[String], aligns: &[&str], rows: impl Iterator<Item = Vec<String>>) -> String {
    let line = |cells: &[String]| format!("| {} |", cells.join(" | "));
    let mut lines = vec![line(heads), format!("| {} |", aligns.join(" | "))];
    lines.extend(rows.map(|cells| line(&cells)));
    lines.join("\n")
}

fn figure(figure: &Figure) -> String {
    let alternative = escaped(&figure.alternative).replace(['[', ']'], " ");
    let image = format!(
        "{}![{alternative}]({})",
        anchor(&figure.anchor),
        target(&figure.file)
    );
    match caption(&figure.label, &figure.caption) {
        text if text.is_empty() => image,
        text => format!("{image}\n\n{text}"),
    }
}

fn equation(equation: &Equation) -> String {
    let tag = match equation.label.trim_matches(['(', ')']) {
        "" => String::new(),
        label => format!(
            " \\tag{{{}}}",
            label
                .chars()
                .filter(|c| c.is_alphanumeric() || ".-–".contains(*c))
                .collect::<String>()
        ),
    };
    let mut text = format!(
        "{}$$ {}{tag} $$",
        anchor(&equation.anchor),
        to_latex(&equation.math).trim()
    );
    if !equation.note.is_empty() {
        text.push_str(&format!(
            "\n\n<sub>{}</sub>",
            inline(&equation.note, Place::Line)
        ));
    }
    text.trim_start().to_owned()
}

fn listing(listing: &Listing) -> String {
    let width = listing.lines.len().to_string().len();
    let line = |(i, text): (usize, &String)| match listing.numbered {
        true => format!("{:>width$}  {text}", i + 1),
        false => text.clone(),
    };
    let body: Vec<String> = listing
        .lines
        .iter()
        .map(|line| line.replace(['\n', '\r'], " "))
        .collect();
    let body: Vec<String> = body.iter().enumerate().map(line).collect();
    // The fence must be longer than any run of backticks inside it.
    let longest = body
        .iter()
        .flat_map(|l| l.split(|c| c != '`'))
        .map(str::len)
        .max()
        .unwrap_or(0);
    let fence = "`".repeat(3.max(longest + 1));
    let head = format!(
        "{}{}",
        anchor(&listing.anchor),
        inline(&listing.caption, Place::Line)
    );
    let head = if head.is_empty() { head } else { head + "\n\n" };
    format!("{head}{fence}text\n{}\n{fence}", body.join("\n"))
}

fn title(title: &Title) -> String {
    let name = format!(
        "# {} {}: {}",
        escaped(&title.kind),
        escaped(&title.number),
        escaped(&title.title)
    );
    let facts = [
        ("Project", &title.project),
        ("Issued by", &title.issuer),
        ("Revision", &title.revision),
        ("Date", &title.date),
        ("Standing", &title.standing),
    ];
    let rows = facts
        .iter()
        .map(|(label, value)| vec![format!("**{label}**"), escaped(value)]);
    format!(
        "{name}\n\n{}",
        grid(&[String::new(), String::new()], &["---", "---"], rows)
    )
}

fn notice(notice: &Notice) -> String {
    let kind = match notice.tone {
        Tone::Good => "> ✓ ",
        Tone::Bad => "> ✗ ",
        Tone::Caution => "> ⚠ ",
        Tone::Plain => "> ",
    };
    let mut lines = vec![format!("{kind}**{}**", escaped(&notice.title))];
    for text in &notice.body {
        lines.push(">".to_owned());
        lines.push(format!(
            "> {}",
            guarded(&inline(text, Place::Line)).replace('\n', "\n> ")
        ));
    }
    lines.join("\n")
}

fn sign_off(signatories: &[Signatory]) -> String {
    let heads = [
        "Role",
        "Name",
        "Capacity",
        "Date",
        "Meaning of the signature",
        "Signature",
    ]
    .map(str::to_owned);
    let rows = signatories.iter().map(|s| {
        let mut cells: Vec<String> = [&s.role, &s.name, &s.capacity, &s.date, &s.meaning]
            .iter()
            .map(|t| escaped(t))
            .collect();
        cells.push(String::new());
        cells
    });
    grid(&heads, &[":--"; 6], rows)
}

fn contents(blocks: &[Block]) -> String {
    // The heading of the contents themselves is no entry.
    let is_title = |i: usize| matches!(blocks.get(i + 1), Some(Block::Contents));
    let entries = blocks
        .iter()
        .enumerate()
        .filter_map(|(i, block)| match block {
            Block::Heading(heading) if heading.level <= 2 && !is_title(i) => {
                let indent = "  ".repeat(usize::from(heading.level.saturating_sub(1)));
                let text = format!("{} {}", heading.number, heading.text);
                Some(format!("{indent}- {}", link(text.trim(), &heading.anchor)))
            }
            _ => None,
        });
    entries.collect::<Vec<_>>().join("\n")
}

fn caption(label: &str, caption: &Text) -> String {
    match (label.is_empty(), caption.is_empty()) {
        (true, _) => inline(caption, Place::Line),
        (false, true) => format!("**{}**", escaped(label)),
        (false, false) => format!("**{}** {}", escaped(label), inline(caption, Place::Line)),
    }
}

fn cell(text: &Text) -> String {
    inline(text, Place::Cell)
}

fn inline(text: &Text, place: Place) -> String {
    let piece = |piece: &Inline| match piece {
        Inline::Text(text) => escaped(text),
        Inline::Emphasis(text) => marked("*", text),
        Inline::Strong(text) => marked("**", text),
        Inline::Code(text) => code(text, place),
        Inline::Math(math) => format!("${}$", to_latex(math).trim()),
        Inline::Reference { text, anchor } => link(text, anchor),
        Inline::Break => match place {
            Place::Cell => "<br>".to_owned(),
            Place::Line => "  \n".to_owned(),
        },
    };
    text.iter().map(piece).collect()
}

/// Emphasis marks must touch the words: white space at the ends goes outside.
fn marked(mark: &str, text: &str) -> String {
    let words = text.trim();
    if words.is_empty() {
        return text.to_owned();
    }
    let (lead, tail) = (
        text.len() - text.trim_start().len(),
        text.len() - text.trim_end().len(),
    );
    format!(
        "{}{mark}{}{mark}{}",
        " ".repeat(lead),
        escaped(words),
        " ".repeat(tail)
    )
}

fn code(text: &str, place: Place) -> String {
    let clean: String = text
        .chars()
        .map(|c| if c.is_control() { ' ' } else { c })
        .collect();
    // A bar ends a cell even inside code; there the text is escaped instead.
    if clean.trim().is_empty() || place == Place::Cell && clean.contains('|') {
        return escaped(&clean);
    }
    let longest = clean.split(|c| c != '`').map(str::len).max().unwrap_or(0);
    let fence = "`".repeat(longest + 1);
    let pad = if clean.starts_with(['`', ' ']) || clean.ends_with(['`', ' ']) {
        " "
    } else {
        ""
    };
    format!("{fence}{pad}{clean}{pad}{fence}")
}

fn link(text: &str, anchor: &str) -> String {
    format!("[{}](#{})", escaped(text), identifier(anchor))
}

fn anchor(anchor: &str) -> String {
    if anchor.is_empty() {
        String::new()
    } else {
        format!("<a id=\"{}\"></a>\n\n", identifier(anchor))
    }
}

fn identifier(anchor: &str) -> String {
    anchor
        .chars()
        .map(|c| {
            if c.is_ascii_alphanumeric() || "-_.:".contains(c) {
                c
            } else {
                '-'
            }
        })
        .collect()
}

/// A relative link target: everything that could end it or act in it is percent-encoded.
fn target(file: &str) -> String {
    let safe = |byte: u8| byte.is_ascii_alphanumeric() || b"-_./~".contains(&byte);
    file.bytes()
        .map(|byte| {
            if safe(byte) {
                char::from(byte).to_string()
            } else {
                format!("%{byte:02X}")
            }
        })
        .collect()
}

fn escaped(text: &str) -> String {
    let mut safe = String::with_capacity(text.len() + 8);
    for character in text.chars() {
        match character {
            '\\' | '`' | '*' | '_' | '{' | '}' | '[' | ']' | '#' | '|' | '~' => {
                safe.push('\\');
                safe.push(character);
            }
            // A backslash does not keep a dollar from opening mathematics everywhere; an entity does.
            '$' => safe.push_str("&#36;"),
            '<' => safe.push_str("&lt;"),
            '>' => safe.push_str("&gt;"),
            '&' => safe.push_str("&amp;"),
            '\n' | '\r' | '\t' => safe.push(' '),
            c if c.is_control() => safe.extend(
                c.escape_unicode()
                    .filter(|c| !matches!(c, '{' | '}' | '\\')),
            ),
            c => safe.push(c),
        }
    }
    // A bare address must not become a link of its own accord.
    safe.replace("://", ":&#47;/").replace("www.", "www&#46;")
}

#[cfg(test)]
mod tests;
