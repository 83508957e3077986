//! What stands displayed between paragraphs: figures and equations.

use std::rc::Rc;

use super::formula;
use super::layout::Layout;
use super::strip::{Drawn, Piece, Strip};
use super::tags::Role;
use super::text::{self, Look, Setting, Slot};
use crate::record::block::{Equation, Figure, Picture};
use crate::render::math::to_plain;
use crate::render::scene::Area;
use crate::render::sketch::{self, Artwork};
use crate::render::{RenderError, figure};

impl Layout<'_> {
    pub(super) fn figure(&mut self, figure: &Figure) -> Result<(), RenderError> {
        let root = self.tags.root();
        let element = self
            .tags
            .add_with_alternative(Role::Figure, root, &figure.alternative);
        let (mark, height) = self.picture(figure)?;
        let mut strip = Strip::new(height);
        strip.anchor = Some(figure.anchor.clone());
        strip.keep_next = true;
        strip.floats = true;
        strip.pieces = vec![Piece {
            element: Some(element),
            marks: vec![mark],
            link: None,
        }];
        let mut strips = vec![strip];
        let caption = self.tags.add(Role::Caption, root);
        let mut below = self.caption(&figure.label, &figure.caption, caption)?;
        below.iter_mut().for_each(|strip| strip.keep_next = true);
        if let Some(first) = below.first_mut() {
            first.before = 5.0;
        }
        if let Some(last) = below.last_mut() {
            last.keep_next = false;
        } else {
            strips[0].keep_next = false;
        }
        strips.append(&mut below);
        self.push(strips, 8.0, 13.0);
        Ok(())
    }

    fn picture(&mut self, figure: &Figure) -> Result<(Drawn, f32), RenderError> {
        let (left, measure) = (self.style.left, self.style.measure());
        let highest = self.style.depth() * 0.6;
        match &figure.picture {
            Picture::Plot(plot) => {
                let scene = figure::draw(plot, self.faces, self.style).map_err(|fault| {
                    RenderError::Plot {
                        file: figure.file.clone(),
                        fault,
                    }
                })?;
                // A plot of very many panels is made to fit on a page.
                let scale = (self.style.depth() * 0.9 / scene.height).min(1.0);
                let height = scene.height * scale;
                let x = left + (measure - scene.width * scale) / 2.0;
                Ok((
                    Drawn::Scene {
                        scene: Rc::new(scene),
                        x,
                        y: 0.0,
                        scale,
                    },
                    height,
                ))
            }
            Picture::Sketch(bytes) => {
                let fault = |fault| RenderError::Picture {
                    file: figure.file.clone(),
                    fault,
                };
                match sketch::read(bytes).map_err(fault)? {
                    Artwork::Vector(scene) => {
                        let scale = (measure / scene.width).min(highest / scene.height).min(1.0);
                        let (width, height) = (scene.width * scale, scene.height * scale);
                        let x = left + (measure - width) / 2.0;
                        Ok((
                            Drawn::Scene {
                                scene: Rc::new(scene),
                                x,
                                y: 0.0,
                                scale,
                            },
                            height,
                        ))
                    }
                    Artwork::Raster(raster) => {
                        let (wide, high) = (raster.width as f32, raster.height as f32);
                        // 150 pixels an inch where there is room for it.
                        let scale = (measure / wide).min(highest / high).min(72.0 / 150.0);
                        let (width, height) = (wide * scale, high * scale);
                        let x = left + (measure - width) / 2.0;
                        self.flow.rasters.push(raster);
                        let index = self.flow.rasters.len() - 1;
                        Ok((
                            Drawn::Raster {
                                index,
                                area: Area {
                                    left: x,
                                    top: 0.0,
                                    right: x + width,
                                    bottom: height,
                                },
                            },
                            height,
                        ))
                    }
                }
            }
        }
    }

    pub(super) fn equation(&mut self, equation: &Equation) -> Result<(), RenderError> {
        const INDENT: f32 = 24.0;
        let (left, measure) = (self.style.left, self.style.measure());
        let look = self.body();
        let number = self.lines(&equation.label, &look, 80.0);
        let number_width = number.first().map_or(0.0, |line| line.width + 12.0);
        let display = formula::display(
            &equation.math,
            self.style.text.equation_pt,
            measure - INDENT - number_width,
            self.faces,
        )?;
        let root = self.tags.root();
        let element =
            self.tags
                .add_with_alternative(Role::Formula, root, &to_plain(&equation.math));
        let count = display.lines.len();
        let mut strips = Vec::new();
        for (i, (indent, layout)) in display.lines.iter().enumerate() {
            let above = layout.ascent.max(look.size * 0.75) + 1.5;
            let below = layout.descent.max(look.size * 0.25) + 1.5;
            let mut strip = Strip::new(above + below);
            let marks = formula::marks(layout, left + INDENT + indent, above, look.colour);
            strip.pieces.push(Piece {
                element: Some(element),
                marks,
                link: None,
            });
            if let (true, Some(line)) = (i + 1 == count, number.first()) {
                let label = self.tags.add(Role::Paragraph, root);
                strip.pieces.extend(text::set_line(
                    line,
                    Slot {
                        x: left,
                        width: measure,
                        setting: Setting::Right,
                    },
                    above,
                    label,
                    &mut self.tags,
                ));
            }
            strip.before = if i > 0 { 3.0 } else { 0.0 };
            strip.keep_next = i + 1 < count;
            strips.push(strip);
        }
        if let Some(first) = strips.first_mut() {
            first.anchor = Some(equation.anchor.clone());
        }
        if !equation.note.is_empty() {
            if let Some(last) = strips.last_mut() {
                last.keep_next = true;
            }
            let note = self.element(Role::Paragraph);
            let look = Look {
                colour: self.style.colour.muted,
                ..self.small()
            };
            let mut below = self.paragraph(
                &equation.note,
                &look,
                Slot::left(left + INDENT, measure - INDENT),
                note,
            )?;
            if let Some(first) = below.first_mut() {
                first.before = 2.0;
            }
            strips.append(&mut below);
        }
        self.push(strips, 8.0, 8.0);
        Ok(())
    }
}
