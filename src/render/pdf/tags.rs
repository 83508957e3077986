//! The document's structure for readers that cannot see the page: elements, their order, their page content.
//!
//! Source: ISO 32000-1, 14.7 and 14.8.

use std::rc::Rc;

use lopdf::{Dictionary, Document, Object, ObjectId, dictionary};

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct ElementId(usize);

/// What an element is, by its standard structure type.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Role {
    Document,
    Part,
    Heading(u8),
    Paragraph,
    Formula,
    Figure,
    Caption,
    Table,
    TableRow,
    /// A head for the column below it.
    ColumnHead,
    /// The name of the rows below it, across this many columns.
    GroupCell(usize),
    RowHead,
    TableCell,
    List,
    ListItem,
    Label,
    ListBody,
    Code,
    Contents,
    ContentsItem,
    Link,
}

struct Element {
    role: Role,
    parent: Option<ElementId>,
    alternative: Option<String>,
    kids: Vec<Kid>,
    attached: bool,
}

enum Kid {
    Element(ElementId),
    Content { page: usize, id: usize },
    Annotation { page: usize, index: usize },
}

/// The tree under construction. An element enters its parent's list when its first mark is drawn, so that the order
/// of the tree is the order of reading.
pub struct Tags {
    elements: Vec<Element>,
    /// The last link or formula in a line of text, by the words that it came from.
    inline: Option<(Rc<str>, ElementId)>,
}

impl Tags {
    pub fn new() -> Tags {
        Tags {
            elements: vec![Element {
                role: Role::Document,
                parent: None,
                alternative: None,
                kids: Vec::new(),
                attached: true,
            }],
            inline: None,
        }
    }

    pub fn root(&self) -> ElementId {
        ElementId(0)
    }

    pub fn add(&mut self, role: Role, parent: ElementId) -> ElementId {
        self.elements.push(Element {
            role,
            parent: Some(parent),
            alternative: None,
            kids: Vec::new(),
            attached: false,
        });
        ElementId(self.elements.len() - 1)
    }

    pub fn add_with_alternative(
        &mut self,
        role: Role,
        parent: ElementId,
        alternative: &str,
    ) -> ElementId {
        let id = self.add(role, parent);
        self.elements[id.0].alternative = Some(alternative.to_owned());
        id
    }

    /// The element of a link or formula within a line. One that goes on in the next line stays one element: it is
    /// known by the identity of its words. The words are what is spoken for a formula.
    pub fn inline(&mut self, role: Role, parent: ElementId, words: &Rc<str>) -> ElementId {
        if let Some((last, id)) = &self.inline
            && Rc::ptr_eq(last, words)
            && self.elements[id.0].parent == Some(parent)
        {
            return *id;
        }
        let id = match role {
            Role::Formula => self.add_with_alternative(role, parent, words),
            _ => self.add(role, parent),
        };
        self.inline = Some((Rc::clone(words), id));
        id
    }

    pub fn role_name(&self, id: ElementId) -> &'static str {
        self.elements[id.0].role.name()
    }

    /// Records that marked content `id` of a page belongs to an element.
    pub fn mark(&mut self, element: ElementId, page: usize, id: usize) {
        self.attach(element);
        self.elements[element.0]
            .kids
            .push(Kid::Content { page, id });
    }

    /// Records that the link annotation `index` of a page belongs to an element.
    pub fn mark_annotation(&mut self, element: ElementId, page: usize, index: usize) {
        self.attach(element);
        self.elements[element.0]
            .kids
            .push(Kid::Annotation { page, index });
    }

    /// Gives an element its place in the tree, now; for elements without content (empty cells).
    pub fn attach(&mut self, element: ElementId) {
        if self.elements[element.0].attached {
            return;
        }
        self.elements[element.0].attached = true;
        if let Some(parent) = self.elements[element.0].parent {
            self.attach(parent);
            self.elements[parent.0].kids.push(Kid::Element(element));
        }
    }

    /// Writes the tree; annotations get their keys into the parent tree. Returns the root's object.
    pub fn write(
        &self,
        document: &mut Document,
        pages: &[ObjectId],
        annotations: &[Vec<ObjectId>],
    ) -> ObjectId {
        let root = document.new_object_id();
        let ids: Vec<ObjectId> = self
            .elements
            .iter()
            .map(|_| document.new_object_id())
            .collect();
        let mut owners: Vec<Vec<Object>> = vec![Vec::new(); pages.len()];
        let mut annotation_owners: Vec<Object> = Vec::new();
        for (element, id) in self
            .elements
            .iter()
            .zip(&ids)
            .filter(|(element, _)| element.attached)
        {
            // Content on the element's own page is named by its number alone.
            let own = element.kids.iter().find_map(|kid| match kid {
                Kid::Content { page, .. } => Some(*page),
                _ => None,
            });
            let mut kids = Vec::new();
            for kid in &element.kids {
                match kid {
                    Kid::Element(child) => kids.push(Object::Reference(ids[child.0])),
                    Kid::Content { page, id: content } => {
                        let list = &mut owners[*page];
                        list.resize((*content + 1).max(list.len()), Object::Null);
                        list[*content] = Object::Reference(*id);
                        let number = *content as i64;
                        kids.push(match own == Some(*page) {
                            true => number.into(),
                            false => {
                                dictionary! { "Type" => "MCR", "Pg" => pages[*page], "MCID" => number }
                                    .into()
                            }
                        });
                    }
                    Kid::Annotation { page, index } => {
                        let object = annotations[*page][*index];
                        let key = (pages.len() + annotation_owners.len()) as i64;
                        if let Ok(annotation) = document.get_dictionary_mut(object) {
                            annotation.set("StructParent", key);
                        }
                        annotation_owners.push(Object::Reference(*id));
                        let reference =
                            dictionary! { "Type" => "OBJR", "Pg" => pages[*page], "Obj" => object };
                        kids.push(reference.into());
                    }
                }
            }
            let parent = element.parent.map_or(root, |parent| ids[parent.0]);
            let mut entry = dictionary! { "Type" => "StructElem", "S" => element.role.name(), "P" => parent, "K" => kids };
            if let Some(page) = own {
                entry.set("Pg", pages[page]);
            }
            if let Some(alternative) = &element.alternative {
                entry.set("Alt", super::finish::text_string(alternative));
            }
            if let Some(attributes) = element.role.attributes() {
                entry.set("A", attributes);
            }
            document.set_object(*id, entry);
        }
        let mut numbers = Vec::new();
        for (page, list) in owners.into_iter().enumerate() {
            numbers.push(Object::Integer(page as i64));
            numbers.push(Object::Reference(document.add_object(Object::Array(list))));
        }
        let next = (pages.len() + annotation_owners.len()) as i64;
        for (i, owner) in annotation_owners.into_iter().enumerate() {
            numbers.push(Object::Integer((pages.len() + i) as i64));
            numbers.push(owner);
        }
        let parents = document.add_object(dictionary! { "Nums" => numbers });
        let tree = dictionary! { "Type" => "StructTreeRoot", "K" => vec![Object::Reference(ids[0])], "ParentTree" => parents, "ParentTreeNextKey" => next };
        document.set_object(root, tree);
        root
    }
}

impl Role {
    fn name(self) -> &'static str {
        match self {
            Role::Document => "Document",
            Role::Part => "Sect",
            Role::Heading(1) => "H1",
            Role::Heading(2) => "H2",
            Role::Heading(_) => "H3",
            Role::Paragraph => "P",
            Role::Formula => "Formula",
            Role::Figure => "Figure",
            Role::Caption => "Caption",
            Role::Table => "Table",
            Role::TableRow => "TR",
            Role::ColumnHead | Role::RowHead => "TH",
            Role::TableCell | Role::GroupCell(_) => "TD",
            Role::List => "L",
            Role::ListItem => "LI",
            Role::Label => "Lbl",
            Role::ListBody => "LBody",
            Role::Code => "Code",
            Role::Contents => "TOC",
            Role::ContentsItem => "TOCI",
            Role::Link => "Link",
        }
    }

    fn attributes(self) -> Option<Dictionary> {
        match self {
            Role::ColumnHead => Some(dictionary! { "O" => "Table", "Scope" => "Column" }),
            Role::RowHead => Some(dictionary! { "O" => "Table", "Scope" => "Row" }),
            Role::GroupCell(columns) => {
                Some(dictionary! { "O" => "Table", "ColSpan" => columns as i64 })
            }
            _ => None,
        }
    }
}
