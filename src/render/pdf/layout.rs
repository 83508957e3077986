//! First pass: blocks become strips. No strip knows yet on which page it will stand.

use super::strip::{Drawn, Flow, OutlineEntry, Piece, Strip};
use super::tags::{ElementId, Role, Tags};
use super::text::{self, Family, Line, Look, Setting, Slot};
use super::{boxes, contents, cover, listing, table};
use crate::record::block::{Block, Document, Heading, Inline, Text};
use crate::render::RenderError;
use crate::render::face::Faces;
use crate::render::style::PageStyle;

/// The state of the first pass.
pub struct Layout<'a> {
    pub style: &'a PageStyle,
    pub faces: &'a Faces,
    pub tags: Tags,
    pub flow: Flow,
    /// Space that the last block wants below it.
    after: f32,
    bands: usize,
}

/// Lays out a whole document.
///
/// # Errors
/// Pictures, plots and formulas that cannot be drawn.
pub fn flow<'a>(
    document: &Document,
    style: &'a PageStyle,
    faces: &'a Faces,
) -> Result<Layout<'a>, RenderError> {
    let mut layout = Layout {
        style,
        faces,
        tags: Tags::new(),
        flow: Flow::default(),
        after: 0.0,
        bands: 0,
    };
    for (i, block) in document.blocks.iter().enumerate() {
        let previous = i
            .checked_sub(1)
            .and_then(|before| document.blocks.get(before));
        let start = layout.flow.strips.len();
        layout.block(block, previous, document)?;
        // A sentence that leads to what is displayed below it does not part from it.
        let leads = matches!(block, Block::Paragraph(_))
            && matches!(
                document.blocks.get(i + 1),
                Some(Block::Equation(_) | Block::List { .. })
            );
        if leads && let Some(last) = layout.flow.strips[start..].last_mut() {
            last.keep_next = true;
        }
    }
    Ok(layout)
}

impl Layout<'_> {
    fn block(
        &mut self,
        block: &Block,
        previous: Option<&Block>,
        document: &Document,
    ) -> Result<(), RenderError> {
        match block {
            Block::Heading(heading) => self.heading(heading),
            Block::Paragraph(text) => {
                let element = self.element(Role::Paragraph);
                let strips = self.paragraph(
                    text,
                    &self.body(),
                    Slot {
                        x: self.style.left,
                        width: self.style.measure(),
                        setting: Setting::Justified,
                    },
                    element,
                )?;
                self.push(strips, 0.0, 6.5);
                Ok(())
            }
            Block::List { ordered, items } => self.list(*ordered, items),
            Block::Table(table) => table::lay_out(self, table),
            Block::Figure(figure) => self.figure(figure),
            Block::Equation(equation) => self.equation(equation),
            Block::Listing(listing) => listing::listing(self, listing),
            Block::Title(title) => cover::title(self, title),
            Block::Facts(facts) => cover::facts(self, facts),
            Block::Notice(notice) => boxes::notice(self, notice),
            Block::SignOff(signatories) => cover::sign_off(self, signatories),
            Block::Checklist(columns) => boxes::checklist(self, columns),
            Block::Contents => {
                let title = match previous {
                    Some(Block::Heading(heading)) => Some(heading),
                    _ => None,
                };
                contents::contents(self, &document.blocks, title)
            }
            Block::PageBreak => {
                let mut strip = Strip::new(0.0);
                strip.new_page = true;
                self.flow.strips.push(strip);
                self.after = 0.0;
                Ok(())
            }
        }
    }

    /// Adds the strips of one block, with at least `before` above and `after` below.
    pub fn push(&mut self, mut strips: Vec<Strip>, before: f32, after: f32) {
        if let Some(first) = strips.first_mut() {
            first.before = before.max(self.after);
            self.after = after;
            self.flow.strips.append(&mut strips);
        }
    }

    /// A new element of the document itself.
    pub fn element(&mut self, role: Role) -> ElementId {
        let root = self.tags.root();
        self.tags.add(role, root)
    }

    pub fn next_band(&mut self) -> usize {
        self.bands += 1;
        self.bands
    }

    pub fn body(&self) -> Look {
        let (text, colour) = (&self.style.text, &self.style.colour);
        Look {
            family: Family::Serif,
            strong: false,
            size: text.size_pt,
            leading: text.leading_pt,
            colour: colour.ink,
            accent: colour.accent,
            hyphenate: true,
        }
    }

    /// Captions, notes, facts.
    pub fn small(&self) -> Look {
        let text = &self.style.text;
        Look {
            family: Family::Sans,
            size: text.small_pt,
            leading: text.small_leading_pt,
            hyphenate: false,
            ..self.body()
        }
    }

    pub fn sans(&self, size: f32, leading: f32, strong: bool) -> Look {
        Look {
            size,
            leading,
            strong,
            ..self.small()
        }
    }

    /// The whole width of the text block.
    pub fn column(&self) -> Slot {
        Slot::left(self.style.left, self.style.measure())
    }

    /// Lines of plain text, ragged.
    pub fn lines(&self, text: &str, look: &Look, width: f32) -> Vec<Line> {
        text::lines(
            &text::plain_words(text, look, self.faces),
            look,
            width,
            Setting::Left,
        )
    }

    /// Sets a paragraph as strips of one line each, with no line left alone at the head or foot of a page.
    pub fn paragraph(
        &mut self,
        text: &Text,
        look: &Look,
        slot: Slot,
        element: ElementId,
    ) -> Result<Vec<Strip>, RenderError> {
        let words = text::words(text, look, self.faces)?;
        let lines = text::lines(&words, look, slot.width, slot.setting);
        Ok(self.line_strips(&lines, slot, element))
    }

    pub fn line_strips(&mut self, lines: &[Line], slot: Slot, element: ElementId) -> Vec<Strip> {
        let count = lines.len();
        let strip = |(i, line): (usize, &Line)| {
            let mut strip = Strip::new(line.above + line.below);
            strip.pieces = text::set_line(line, slot, line.above, element, &mut self.tags);
            strip.keep_next = count > 1 && (i == 0 || i + 2 == count);
            strip
        };
        lines.iter().enumerate().map(strip).collect()
    }

    /// Lines one below the other in a single strip, from `top`; returns the height below them.
    pub fn stack(
        &mut self,
        lines: &[Line],
        slot: Slot,
        top: f32,
        element: ElementId,
        into: &mut Vec<Piece>,
    ) -> f32 {
        let mut y = top;
        for line in lines {
            into.extend(text::set_line(
                line,
                slot,
                y + line.above,
                element,
                &mut self.tags,
            ));
            y += line.above + line.below;
        }
        y
    }

    fn heading(&mut self, heading: &Heading) -> Result<(), RenderError> {
        let (size, leading, before, after) = match heading.level {
            1 => (16.0, 20.0, 22.0, 8.0),
            2 => (12.2, 16.0, 16.0, 5.0),
            _ => (10.2, 14.0, 12.0, 3.5),
        };
        let look = self.sans(size, leading, true);
        let element = self.element(Role::Heading(heading.level));
        let number_look = Look {
            colour: self.style.colour.accent,
            ..look
        };
        let number = self.lines(&heading.number, &number_look, 200.0);
        let indent = number
            .first()
            .map_or(0.0, |line| (line.width + 0.75 * size).max(30.0));
        let (x, width) = (self.style.left, self.style.measure());
        let mut strips = self.paragraph(
            &vec![Inline::Text(heading.text.clone())],
            &look,
            Slot::left(x + indent, width - indent),
            element,
        )?;
        if let (Some(line), Some(first)) = (number.first(), strips.first_mut()) {
            let mut pieces = text::set_line(
                line,
                Slot::left(x, width),
                line.above,
                element,
                &mut self.tags,
            );
            pieces.append(&mut first.pieces);
            first.pieces = pieces;
        }
        strips.iter_mut().for_each(|strip| strip.keep_next = true);
        if let Some(first) = strips.first_mut() {
            let title = format!("{} {}", heading.number, heading.text);
            first.anchor = Some(heading.anchor.clone());
            first.outline = Some(OutlineEntry {
                level: heading.level,
                title: title.trim().to_owned(),
            });
        }
        self.push(strips, before, after);
        Ok(())
    }

    fn list(&mut self, ordered: bool, items: &[Text]) -> Result<(), RenderError> {
        let look = self.body();
        let list = self.element(Role::List);
        let indent = if ordered { 20.0 } else { 15.0 };
        let (left, width) = (self.style.left + 4.0, self.style.measure() - 4.0 - indent);
        for (i, text) in items.iter().enumerate() {
            let item = self.tags.add(Role::ListItem, list);
            let (label, body) = (
                self.tags.add(Role::Label, item),
                self.tags.add(Role::ListBody, item),
            );
            let mark = if ordered {
                format!("{}.", i + 1)
            } else {
                "•".to_owned()
            };
            let mark_look = Look {
                colour: self.style.colour.accent,
                ..look
            };
            let mark_lines = self.lines(&mark, &mark_look, indent);
            let mut pieces = Vec::new();
            if let Some(line) = mark_lines.first() {
                pieces = text::set_line(
                    line,
                    Slot::left(left, indent - 5.0),
                    line.above,
                    label,
                    &mut self.tags,
                );
            }
            let mut strips = self.paragraph(
                text,
                &look,
                Slot {
                    x: left + indent,
                    width,
                    setting: Setting::Justified,
                },
                body,
            )?;
            if let (Some(first), Some(line)) = (strips.first_mut(), mark_lines.first()) {
                // A tall formula lowers the first baseline: the mark follows it.
                let drop = (first.height - look.leading).max(0.0);
                let shift = if drop > 0.0 {
                    baseline(&first.pieces).map_or(0.0, |b| b - line.above)
                } else {
                    0.0
                };
                pieces
                    .iter_mut()
                    .flat_map(|piece| &mut piece.marks)
                    .for_each(|mark| mark.shift(0.0, shift));
                pieces.append(&mut first.pieces);
                first.pieces = pieces;
            }
            // No item stands alone at the head or foot of a page.
            let count = items.len();
            if let Some(last) = strips.last_mut() {
                last.keep_next |= count > 1 && (i == 0 || i + 2 == count);
            }
            let after = if i + 1 == count { 6.5 } else { 2.0 };
            self.push(strips, 2.0, after);
        }
        Ok(())
    }

    /// Label and caption of a table or figure, with a hanging indent.
    pub fn caption(
        &mut self,
        label: &str,
        caption: &Text,
        element: ElementId,
    ) -> Result<Vec<Strip>, RenderError> {
        let look = self.small();
        let label_look = Look {
            strong: true,
            colour: self.style.colour.accent,
            ..look
        };
        let label_lines = self.lines(label, &label_look, 160.0);
        let indent = label_lines.first().map_or(0.0, |line| line.width + 8.0);
        let (x, width) = (self.style.left, self.style.measure());
        let mut strips = self.paragraph(
            caption,
            &look,
            Slot::left(x + indent, width - indent),
            element,
        )?;
        if strips.is_empty() && !label.is_empty() {
            strips.push(Strip::new(look.leading));
        }
        if let (Some(line), Some(first)) = (label_lines.first(), strips.first_mut()) {
            let mut pieces = text::set_line(
                line,
                Slot::left(x, width),
                line.above,
                element,
                &mut self.tags,
            );
            pieces.append(&mut first.pieces);
            first.pieces = pieces;
        }
        Ok(strips)
    }
}

fn baseline(pieces: &[Piece]) -> Option<f32> {
    pieces
        .iter()
        .flat_map(|piece| &piece.marks)
        .find_map(|mark| match mark {
            Drawn::Glyphs(run) => Some(run.baseline),
            _ => None,
        })
}
