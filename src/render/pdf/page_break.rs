//! Second pass: strips become pages.
//!
//! Strips chained by `keep_next` stand on one page; a chain taller than a page breaks where the page ends. A strip
//! with repeated heads gets them again when it opens a page. A figure that does not fit waits for the head of the next
//! page while text fills this one, but never past a heading.

use super::strip::{Flow, RunningHead, Strip};

/// A page: strips with the height of their top edge, counted from the top of the sheet.
#[derive(Debug, Default)]
pub struct Page {
    pub placed: Vec<(f32, Strip)>,
    pub cover: bool,
}

/// Room for text on a page, counted from the top of the sheet.
#[derive(Clone, Copy, Debug)]
pub struct Room {
    pub top: f32,
    pub bottom: f32,
}

/// Distributes strips over pages; there is always at least one page.
pub fn paginate(flow: Flow, room: Room) -> Vec<Page> {
    let mut breaker = Breaker {
        room,
        heads: flow.heads,
        pages: vec![Page::default()],
        y: room.top,
        waiting: Vec::new(),
    };
    let mut strips = flow.strips.into_iter().peekable();
    let mut group: Vec<Strip> = Vec::new();
    while let Some(strip) = strips.next() {
        if strip.new_page {
            breaker.take(std::mem::take(&mut group));
            breaker.settle();
            breaker.turn();
            continue;
        }
        let ends = !strip.keep_next || strips.peek().is_none_or(|next| next.new_page);
        group.push(strip);
        if ends {
            breaker.take(std::mem::take(&mut group));
        }
    }
    breaker.take(group);
    breaker.settle();
    let mut pages = breaker.pages;
    if pages.len() > 1 && pages.last().is_some_and(|page| page.placed.is_empty()) {
        pages.pop();
    }
    pages
}

/// A figure waits for the next page only if what is left of this one is worth filling.
const WORTH_FILLING: f32 = 48.0;

struct Breaker {
    room: Room,
    heads: Vec<RunningHead>,
    pages: Vec<Page>,
    y: f32,
    /// Chains that float to the head of the next page, in their order.
    waiting: Vec<Vec<Strip>>,
}

impl Breaker {
    /// Places a chain, or lets it wait if it floats and does not fit.
    fn take(&mut self, group: Vec<Strip>) {
        let Some(first) = group.first() else { return };
        // A heading opens new matter: what belongs above it must stand before it.
        if group.iter().any(|strip| strip.outline.is_some()) {
            self.settle();
        } else if first.floats {
            let left = self.room.bottom - self.y;
            if !self.waiting.is_empty() || !self.fits(&group) && left > WORTH_FILLING {
                self.waiting.push(group);
                return;
            }
        } else if !self.waiting.is_empty() && !self.fits(&group) {
            self.settle();
        }
        self.place_group(group);
    }

    /// Places what is waiting at the head of a new page.
    fn settle(&mut self) {
        for group in std::mem::take(&mut self.waiting) {
            self.place_group(group);
        }
    }

    fn fits(&self, group: &[Strip]) -> bool {
        let height: f32 = group.iter().map(|strip| strip.before + strip.height).sum();
        let dropped = if self.is_empty() {
            group.first().map_or(0.0, |first| first.before)
        } else {
            0.0
        };
        self.y + height - dropped <= self.room.bottom + 0.01
    }

    fn place_group(&mut self, group: Vec<Strip>) {
        let Some(first) = group.first() else { return };
        if !self.is_empty() && !self.fits(&group) {
            self.turn_before(first.head);
        }
        for strip in group {
            let before = if self.is_empty() { 0.0 } else { strip.before };
            let over = self.y + before + strip.height > self.room.bottom + 0.01;
            if !self.is_empty() && over && self.has_body() {
                // Only a chain taller than the page comes here.
                self.turn_before(strip.head);
            }
            self.place(strip);
        }
    }

    fn place(&mut self, strip: Strip) {
        if !self.is_empty() {
            self.y += strip.before;
        }
        let top = self.y;
        self.y += strip.height;
        if let Some(page) = self.pages.last_mut() {
            page.cover |= strip.cover;
            page.placed.push((top, strip));
        }
    }

    fn turn_before(&mut self, head: Option<usize>) {
        let Some(head) = head.and_then(|index| self.heads.get(index)).cloned() else {
            self.turn();
            return;
        };
        // The tail belongs under the last row of the same table, not under whatever stood before its first row.
        let table_stands_here = self
            .pages
            .last()
            .and_then(|page| page.placed.last())
            .is_some_and(|(_, strip)| strip.head.is_some());
        if table_stands_here {
            self.place(Strip {
                pieces: vec![head.tail],
                ..Strip::default()
            });
        }
        self.turn();
        for strip in head.strips {
            self.place(strip);
        }
    }

    fn turn(&mut self) {
        // Two breaks in a row make no empty page.
        if !self.is_empty() {
            self.pages.push(Page::default());
            self.y = self.room.top;
        }
    }

    fn is_empty(&self) -> bool {
        self.pages.last().is_none_or(|page| page.placed.is_empty())
    }

    /// Whether the page holds more than repeated heads.
    fn has_body(&self) -> bool {
        let has_element = |strip: &Strip| strip.pieces.iter().any(|piece| piece.element.is_some());
        self.pages
            .last()
            .is_some_and(|page| page.placed.iter().any(|(_, strip)| has_element(strip)))
    }
}

#[cfg(test)]
mod tests {
    use super::super::strip::{OutlineEntry, Piece};
    use super::super::tags::{Role, Tags};
    use super::*;
    use crate::render::style::Rgb;

    fn strip(height: f32, keep_next: bool) -> Strip {
        let mut tags = Tags::new();
        let root = tags.root();
        let element = tags.add(Role::Paragraph, root);
        let piece = Piece {
            element: Some(element),
            marks: Vec::new(),
            link: None,
        };
        Strip {
            height,
            keep_next,
            before: 5.0,
            pieces: vec![piece],
            ..Strip::default()
        }
    }

    fn pages(strips: Vec<Strip>) -> Vec<Vec<f32>> {
        let pages = paginate(
            Flow {
                strips,
                ..Flow::default()
            },
            Room {
                top: 0.0,
                bottom: 100.0,
            },
        );
        pages
            .iter()
            .map(|page| page.placed.iter().map(|(top, _)| *top).collect())
            .collect()
    }

    #[test]
    fn hand_a_chain_moves_to_the_next_page_as_a_whole() {
        let found = pages(vec![
            strip(60.0, false),
            strip(20.0, true),
            strip(20.0, false),
        ]);
        assert_eq!(found, vec![vec![0.0], vec![0.0, 25.0]]);
    }

    #[test]
    fn hand_space_above_is_dropped_at_the_head_of_a_page() {
        assert_eq!(
            pages(vec![strip(100.0, false), strip(100.0, false)]),
            vec![vec![0.0], vec![0.0]]
        );
    }

    #[test]
    fn hand_a_chain_taller_than_a_page_breaks_where_it_must() {
        let found = pages(vec![
            strip(60.0, true),
            strip(30.0, true),
            strip(30.0, false),
        ]);
        assert_eq!(found, vec![vec![0.0, 65.0], vec![0.0]]);
    }

    #[test]
    fn hand_forced_breaks_leave_no_empty_pages() {
        let mut turn = Strip::new(0.0);
        turn.new_page = true;
        let found = pages(vec![
            turn.clone(),
            strip(10.0, false),
            turn.clone(),
            turn.clone(),
            strip(10.0, false),
            turn,
        ]);
        assert_eq!(found, vec![vec![0.0], vec![0.0]]);
    }

    #[test]
    fn hand_heads_are_repeated() {
        let tail = Strip::rule(0.0, 1.0, 0.0, 0.3, Rgb(0, 0, 0));
        let head = RunningHead {
            strips: vec![Strip::new(12.0)],
            tail,
        };
        let mut row = strip(40.0, false);
        row.head = Some(0);
        let flow = Flow {
            strips: vec![row.clone(), row.clone(), row],
            heads: vec![head],
            rasters: Vec::new(),
        };
        let pages = paginate(
            flow,
            Room {
                top: 0.0,
                bottom: 100.0,
            },
        );
        let tops: Vec<Vec<f32>> = pages
            .iter()
            .map(|page| page.placed.iter().map(|(top, _)| *top).collect())
            .collect();
        assert_eq!(tops, vec![vec![0.0, 45.0, 85.0], vec![0.0, 17.0]]);
    }

    #[test]
    fn hand_a_figure_waits_for_the_next_page_but_not_past_a_heading() {
        let figure = Strip {
            floats: true,
            ..strip(70.0, false)
        };
        let text = || strip(10.0, false);
        let heading = || {
            let outline = OutlineEntry {
                level: 1,
                title: "Next".into(),
            };
            Strip {
                outline: Some(outline),
                ..strip(10.0, false)
            }
        };
        let mut strips = vec![strip(40.0, false), figure.clone()];
        strips.extend((0..5).map(|_| text()));
        let filled = vec![vec![0.0, 45.0, 60.0, 75.0, 90.0], vec![0.0, 75.0]];
        assert_eq!(pages(strips), filled);
        let barred = pages(vec![strip(40.0, false), figure, heading()]);
        assert_eq!(barred, vec![vec![0.0], vec![0.0, 75.0]]);
    }
}
