//! Tables for people and machines: terminal, Markdown, CSV. Cells may come from a stranger.

use std::fmt::Write;

use crate::package::name::is_hidden;

/// A head and rows of as many cells.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Table {
    pub title: String,
    pub head: Vec<&'static str>,
    pub rows: Vec<Vec<String>>,
}

/// Text on one line that cannot move a cursor, hide, or turn the text around.
pub fn plain(text: &str) -> String {
    let mut shown = String::new();
    for character in text.chars() {
        match character {
            '\n' | '\r' | '\t' => shown.push(' '),
            hidden if is_hidden(hidden) => shown.extend(hidden.escape_unicode()),
            visible => shown.push(visible),
        }
    }
    shown
}

impl Table {
    pub fn new(title: &str, head: &[&'static str]) -> Table {
        Table {
            title: title.to_owned(),
            head: head.to_vec(),
            rows: Vec::new(),
        }
    }

    /// Columns as wide as their widest cell, two spaces apart, below the title.
    pub fn terminal(&self) -> String {
        const WIDEST: usize = 60;
        let head: Vec<String> = self.head.iter().map(|cell| (*cell).to_owned()).collect();
        let shown: Vec<Vec<String>> = std::iter::once(head)
            .chain(self.rows.iter().map(|row| {
                row.iter()
                    .map(|cell| shortened(&plain(cell), WIDEST))
                    .collect()
            }))
            .collect();
        let width = |column: usize| {
            let cells = shown.iter().filter_map(|row| row.get(column));
            cells.map(|cell| cell.chars().count()).max().unwrap_or(0)
        };
        let widths: Vec<usize> = (0..self.head.len()).map(width).collect();
        let mut text = String::new();
        if !self.title.is_empty() {
            let _ = writeln!(text, "{}", plain(&self.title));
        }
        for row in &shown {
            let mut line = String::new();
            for (cell, width) in row.iter().zip(&widths) {
                let _ = write!(line, "  {cell}");
                line.extend(std::iter::repeat_n(' ', width - cell.chars().count()));
            }
            let _ = writeln!(text, "{}", line.trim_end());
        }
        text
    }

    /// A heading and a table of GitHub's flavour; nothing in a cell can act as markup.
    pub fn markdown(&self) -> String {
        let mut text = String::new();
        if !self.title.is_empty() {
            let _ = writeln!(text, "## {}\n", in_markdown(&self.title));
        }
        let line = |cells: Vec<String>| format!("| {} |\n", cells.join(" | "));
        text.push_str(&line(
            self.head.iter().map(|cell| in_markdown(cell)).collect(),
        ));
        text.push_str(&line(self.head.iter().map(|_| "---".to_owned()).collect()));
        for row in &self.rows {
            text.push_str(&line(row.iter().map(|cell| in_markdown(cell)).collect()));
        }
        text
    }

    /// RFC 4180; a cell that a spreadsheet would take for a formula gets an apostrophe before it.
    pub fn csv(&self) -> String {
        let mut text = String::new();
        let head = self.head.iter().map(|cell| (*cell).to_owned()).collect();
        for row in std::iter::once(&head).chain(&self.rows) {
            let cells: Vec<String> = row.iter().map(|cell| in_csv(cell)).collect();
            text.push_str(&cells.join(","));
            text.push_str("\r\n");
        }
        text
    }
}

/// Escapes what Markdown or the HTML in it would act on.
pub fn in_markdown(text: &str) -> String {
    let mut shown = String::new();
    for character in plain(text).chars() {
        match character {
            '<' => shown.push_str("&lt;"),
            '>' => shown.push_str("&gt;"),
            '&' => shown.push_str("&amp;"),
            '\\' | '`' | '*' | '_' | '[' | ']' | '|' | '~' | '#' | '!' => {
                shown.push('\\');
                shown.push(character);
            }
            other => shown.push(other),
        }
    }
    shown
}

fn in_csv(cell: &str) -> String {
    let cell = plain(cell);
    let acts = cell.starts_with(['=', '+', '-', '@']) && cell.parse::<f64>().is_err();
    let guarded = if acts { format!("'{cell}") } else { cell };
    if guarded.contains([',', '"']) || guarded.starts_with(' ') || guarded.ends_with(' ') {
        format!("\"{}\"", guarded.replace('"', "\"\""))
    } else {
        guarded
    }
}

fn shortened(text: &str, widest: usize) -> String {
    if text.chars().count() <= widest {
        return text.to_owned();
    }
    text.chars().take(widest - 1).chain(['…']).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn table(cell: &str) -> Table {
        let mut table = Table::new("Title", &["first", "second"]);
        table.rows.push(vec![cell.to_owned(), "x".to_owned()]);
        table
    }

    #[test]
    fn hand_columns_stand_below_each_other() {
        let terminal = table("a longer cell").terminal();
        assert_eq!(
            terminal,
            "Title\n  first          second\n  a longer cell  x\n"
        );
    }

    #[test]
    fn hand_no_cell_acts_on_a_terminal() {
        let text = table("a\u{1b}[2Jb\nc\u{202e}d").terminal();
        assert!(!text.contains('\u{1b}') && !text.contains('\u{202e}'));
        assert_eq!(text.lines().count(), 3);
    }

    #[test]
    fn hand_no_cell_acts_as_markup() {
        let text = table("a|b<script>*c*[d](e)`f`\ng").markdown();
        let row = text.lines().last().unwrap();
        assert_eq!(row, "| a\\|b&lt;script&gt;\\*c\\*\\[d\\](e)\\`f\\` g | x |");
    }

    /// RFC 4180, sections 2.5 to 2.7, by a reader of its own.
    #[test]
    fn val_csv_reads_back_and_no_cell_is_a_formula() {
        for (cell, expected) in [
            ("plain", "plain"),
            ("a,b", "a,b"),
            ("say \"no\"", "say \"no\""),
            ("two\nlines", "two lines"),
            ("=1+1", "'=1+1"),
            ("-2.5e-3", "-2.5e-3"),
            ("-cmd", "'-cmd"),
            ("@a", "'@a"),
            ("+A1", "'+A1"),
        ] {
            let text = table(cell).csv();
            let mut reader = csv::Reader::from_reader(text.as_bytes());
            let record = reader.records().next().unwrap().unwrap();
            assert_eq!(&record[0], expected, "{cell}");
            assert_eq!(record.len(), 2);
        }
    }
}
