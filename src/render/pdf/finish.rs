//! What makes pages a document: metadata, outline, page labels, structure, links, output intent, identifier.
//!
//! Sources: ISO 32000-1; ISO 19005-2 for the keys of an archival file. No key is a claim of a validated file.

use lopdf::{Dictionary, Document, Object, ObjectId, Stream, StringFormat, dictionary};
use sha2::{Digest, Sha256};

use super::profile;
use super::tags::Tags;
use crate::record::block::Identity;
use crate::render::RenderError;
use crate::render::scene::Area;
use crate::render::style::PageStyle;

/// A place that links and the outline lead to: page index and height from the top of the sheet.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Place {
    pub page: usize,
    pub y: f32,
}

pub struct Outline {
    pub level: u8,
    pub title: String,
    pub place: Place,
}

pub struct Link {
    pub area: Area,
    pub target: Place,
    /// What the link says it leads to.
    pub description: String,
    pub element: super::tags::ElementId,
}

pub struct Finish<'a> {
    pub identity: &'a Identity,
    pub style: &'a PageStyle,
    pub outline: Vec<Outline>,
    /// Links of each page.
    pub links: Vec<Vec<Link>>,
    pub tags: Tags,
}

/// Completes the pages and writes the file.
///
/// # Errors
/// [`RenderError::Assembly`] if a part that the page writer always makes is not there.
pub fn write(mut document: Document, mut finish: Finish<'_>) -> Result<Vec<u8>, RenderError> {
    document.version = "1.7".to_owned();
    let pages: Vec<ObjectId> = document.page_iter().collect();
    let annotations = links(&mut document, &pages, &mut finish)?;
    for (i, page) in pages.iter().enumerate() {
        let entry = document
            .get_dictionary_mut(*page)
            .map_err(|_| RenderError::Assembly("page"))?;
        entry.remove(b"TrimBox");
        entry.remove(b"CropBox");
        entry.set("StructParents", i as i64);
        entry.set("Tabs", "S");
    }
    let structure = finish.tags.write(&mut document, &pages, &annotations);
    let outline = outline(&mut document, &pages, &finish);
    let stamps = Stamps::of(finish.identity);
    let metadata = metadata(&mut document, finish.identity, &stamps);
    let profile = document.add_object(Stream::new(dictionary! { "N" => 3 }, profile::srgb()));
    let intent = dictionary! {
        "Type" => "OutputIntent", "S" => "GTS_PDFA1", "OutputConditionIdentifier" => text_string("sRGB"),
        "Info" => text_string("sRGB IEC61966-2.1"), "DestOutputProfile" => profile
    };
    let catalog = document
        .catalog_mut()
        .map_err(|_| RenderError::Assembly("catalog"))?;
    catalog.remove(b"PageLayout");
    catalog.set("Lang", text_string(&finish.style.text.language));
    catalog.set("MarkInfo", dictionary! { "Marked" => true });
    catalog.set("StructTreeRoot", structure);
    catalog.set("Metadata", metadata);
    catalog.set("OutputIntents", vec![intent.into()]);
    catalog.set(
        "ViewerPreferences",
        dictionary! { "DisplayDocTitle" => true },
    );
    catalog.set(
        "PageLabels",
        dictionary! { "Nums" => vec![Object::Integer(0), dictionary! { "S" => "D" }.into()] },
    );
    match outline {
        Some(outline) => {
            catalog.set("Outlines", outline);
            catalog.set("PageMode", "UseOutlines");
        }
        None => catalog.set("PageMode", "UseNone"),
    }
    if let Ok(blank) = document.trailer.get(b"Info").and_then(Object::as_reference) {
        document.objects.remove(&blank);
    }
    let information = document.add_object(information(finish.identity, &stamps));
    document.trailer.set("Info", information);
    save(document)
}

/// A text string: as it is if it is plain ASCII, else UTF-16 with its mark.
pub fn text_string(text: &str) -> Object {
    if text.bytes().all(|byte| (0x20..0x7f).contains(&byte)) {
        return Object::String(text.as_bytes().to_vec(), StringFormat::Literal);
    }
    let mut bytes = vec![0xfe, 0xff];
    bytes.extend(text.encode_utf16().flat_map(u16::to_be_bytes));
    Object::String(bytes, StringFormat::Hexadecimal)
}

fn links(
    document: &mut Document,
    pages: &[ObjectId],
    finish: &mut Finish<'_>,
) -> Result<Vec<Vec<ObjectId>>, RenderError> {
    let height = finish.style.height;
    let mut all = Vec::new();
    for (page, links) in finish.links.iter().enumerate() {
        let mut ids = Vec::new();
        for (index, link) in links.iter().enumerate() {
            let area = link.area;
            let rect = [
                area.left,
                height - area.bottom,
                area.right,
                height - area.top,
            ]
            .map(|v| Object::Real(round(v)));
            let target = destination(pages, link.target, finish.style);
            let annotation = dictionary! {
                "Type" => "Annot", "Subtype" => "Link", "Rect" => rect.to_vec(), "Border" => vec![0.into(), 0.into(), 0.into()],
                "F" => 4, "P" => pages[page], "Dest" => target, "Contents" => text_string(&link.description)
            };
            ids.push(document.add_object(annotation));
            finish.tags.mark_annotation(link.element, page, index);
        }
        let entry = document
            .get_dictionary_mut(pages[page])
            .map_err(|_| RenderError::Assembly("page"))?;
        match ids.is_empty() {
            true => {
                entry.remove(b"Annots");
            }
            false => entry.set(
                "Annots",
                ids.iter()
                    .map(|id| Object::Reference(*id))
                    .collect::<Vec<_>>(),
            ),
        }
        all.push(ids);
    }
    Ok(all)
}

fn destination(pages: &[ObjectId], place: Place, style: &PageStyle) -> Object {
    let page = pages[place.page.min(pages.len() - 1)];
    let top = (style.height - place.y + 10.0).min(style.height);
    Object::Array(vec![
        page.into(),
        "XYZ".into(),
        Object::Real(round(style.left - 12.0)),
        Object::Real(round(top)),
        Object::Null,
    ])
}

/// The nested outline; nothing if there are no headings.
fn outline(document: &mut Document, pages: &[ObjectId], finish: &Finish<'_>) -> Option<ObjectId> {
    let entries = &finish.outline;
    if entries.is_empty() {
        return None;
    }
    let root = document.new_object_id();
    let ids: Vec<ObjectId> = entries.iter().map(|_| document.new_object_id()).collect();
    let parent_of = |i: usize| (0..i).rev().find(|j| entries[*j].level < entries[i].level);
    let parents: Vec<Option<usize>> = (0..entries.len()).map(parent_of).collect();
    let children = |parent: Option<usize>| -> Vec<usize> {
        (0..entries.len())
            .filter(|i| parents[*i] == parent)
            .collect()
    };
    for (i, entry) in entries.iter().enumerate() {
        let siblings = children(parents[i]);
        let place = siblings
            .iter()
            .position(|sibling| *sibling == i)
            .unwrap_or(0);
        let mut item = dictionary! {
            "Title" => text_string(&entry.title), "Parent" => parents[i].map_or(root, |parent| ids[parent]),
            "Dest" => destination(pages, entry.place, finish.style)
        };
        if place > 0 {
            item.set("Prev", ids[siblings[place - 1]]);
        }
        if let Some(next) = siblings.get(place + 1) {
            item.set("Next", ids[*next]);
        }
        let below = children(Some(i));
        if let (Some(first), Some(last)) = (below.first(), below.last()) {
            item.set("First", ids[*first]);
            item.set("Last", ids[*last]);
            // Negative: closed until the reader opens it.
            item.set("Count", -(below.len() as i64));
        }
        document.set_object(ids[i], item);
    }
    let top = children(None);
    let (first, last) = (*top.first()?, *top.last()?);
    document.set_object(root, dictionary! { "Type" => "Outlines", "First" => ids[first], "Last" => ids[last], "Count" => top.len() as i64 });
    Some(root)
}

/// The document's date in the two notations of the file; nothing if it is not a calendar date.
struct Stamps {
    information: Option<String>,
    metadata: Option<String>,
}

impl Stamps {
    fn of(identity: &Identity) -> Stamps {
        let date = identity.date.as_str();
        let shape: String = date
            .chars()
            .map(|c| if c.is_ascii_digit() { 'd' } else { c })
            .collect();
        let valid = shape == "dddd-dd-dd";
        Stamps {
            information: valid.then(|| format!("D:{}000000Z", date.replace('-', ""))),
            metadata: valid.then(|| format!("{date}T00:00:00Z")),
        }
    }
}

fn subject(identity: &Identity) -> String {
    [identity.project.as_str(), identity.fingerprint.as_str()]
        .iter()
        .filter(|part| !part.is_empty())
        .copied()
        .collect::<Vec<_>>()
        .join(" · ")
}

fn title(identity: &Identity) -> String {
    format!("{} {}", identity.number, identity.title)
        .trim()
        .to_owned()
}

fn information(identity: &Identity, stamps: &Stamps) -> Dictionary {
    let mut entries = dictionary! {
        "Title" => text_string(&title(identity)), "Author" => text_string(&identity.author),
        "Subject" => text_string(&subject(identity)), "Creator" => text_string(&identity.program),
        "Producer" => text_string(&identity.program)
    };
    if let Some(date) = &stamps.information {
        entries.set("CreationDate", text_string(date));
        entries.set("ModDate", text_string(date));
    }
    entries
}

/// An archival file describes each key that its own standard does not know: here the one of PDF/UA.
const EXTENSION: &str = "<pdfaExtension:schemas><rdf:Bag><rdf:li rdf:parseType=\"Resource\">\
    <pdfaSchema:schema>PDF/UA Universal Accessibility Schema</pdfaSchema:schema>\
    <pdfaSchema:namespaceURI>http://www.aiim.org/pdfua/ns/id/</pdfaSchema:namespaceURI>\
    <pdfaSchema:prefix>pdfuaid</pdfaSchema:prefix>\
    <pdfaSchema:property><rdf:Seq><rdf:li rdf:parseType=\"Resource\">\
    <pdfaProperty:name>part</pdfaProperty:name><pdfaProperty:valueType>Integer</pdfaProperty:valueType>\
    <pdfaProperty:category>internal</pdfaProperty:category>\
    <pdfaProperty:description>Part of ISO 14289 whose rules the file follows</pdfaProperty:description>\
    </rdf:li></rdf:Seq></pdfaSchema:property></rdf:li></rdf:Bag></pdfaExtension:schemas>";

fn metadata(document: &mut Document, identity: &Identity, stamps: &Stamps) -> ObjectId {
    let escaped = |text: &str| {
        let shown = crate::render::face::printable(text);
        shown
            .replace('&', "&amp;")
            .replace('<', "&lt;")
            .replace('>', "&gt;")
    };
    let program = escaped(&identity.program);
    let dates = stamps.metadata.as_ref().map_or_else(String::new, |date| {
        format!("<xmp:CreateDate>{date}</xmp:CreateDate><xmp:ModifyDate>{date}</xmp:ModifyDate><xmp:MetadataDate>{date}</xmp:MetadataDate>")
    });
    let packet = format!(
        "<?xpacket begin=\"\u{feff}\" id=\"W5M0MpCehiHzreSzNTczkc9d\"?>\n\
         <x:xmpmeta xmlns:x=\"adobe:ns:meta/\"><rdf:RDF xmlns:rdf=\"http://www.w3.org/1999/02/22-rdf-syntax-ns#\">\n\
         <rdf:Description rdf:about=\"\" xmlns:pdfaExtension=\"http://www.aiim.org/pdfa/ns/extension/\" \
         xmlns:pdfaSchema=\"http://www.aiim.org/pdfa/ns/schema#\" \
         xmlns:pdfaProperty=\"http://www.aiim.org/pdfa/ns/property#\">{EXTENSION}</rdf:Description>\n\
         <rdf:Description rdf:about=\"\" xmlns:dc=\"http://purl.org/dc/elements/1.1/\" \
         xmlns:xmp=\"http://ns.adobe.com/xap/1.0/\" xmlns:pdf=\"http://ns.adobe.com/pdf/1.3/\" \
         xmlns:pdfaid=\"http://www.aiim.org/pdfa/ns/id/\" xmlns:pdfuaid=\"http://www.aiim.org/pdfua/ns/id/\">\n\
         <dc:format>application/pdf</dc:format>\
         <dc:title><rdf:Alt><rdf:li xml:lang=\"x-default\">{title}</rdf:li></rdf:Alt></dc:title>\
         <dc:creator><rdf:Seq><rdf:li>{author}</rdf:li></rdf:Seq></dc:creator>\
         <dc:description><rdf:Alt><rdf:li xml:lang=\"x-default\">{subject}</rdf:li></rdf:Alt></dc:description>\
         {dates}<xmp:CreatorTool>{program}</xmp:CreatorTool><pdf:Producer>{program}</pdf:Producer>\
         <pdfaid:part>2</pdfaid:part><pdfaid:conformance>B</pdfaid:conformance>\
         <pdfuaid:part>1</pdfuaid:part>\n\
         </rdf:Description></rdf:RDF></x:xmpmeta>\n<?xpacket end=\"r\"?>",
        title = escaped(&title(identity)),
        author = escaped(&identity.author),
        subject = escaped(&subject(identity)),
    );
    let mut stream = Stream::new(
        dictionary! { "Type" => "Metadata", "Subtype" => "XML" },
        packet.into_bytes(),
    );
    stream.allows_compression = false;
    document.add_object(stream)
}

/// Writes the file twice: the identifier is the digest of the file without one.
fn save(mut document: Document) -> Result<Vec<u8>, RenderError> {
    let failed = |_| RenderError::Assembly("file");
    document.compress();
    let blank = Object::String(vec![0; 16], StringFormat::Hexadecimal);
    document.trailer.set("ID", vec![blank.clone(), blank]);
    let mut first = Vec::new();
    document.save_to(&mut first).map_err(failed)?;
    let digest = Sha256::digest(&first);
    let identifier = Object::String(digest[..16].to_vec(), StringFormat::Hexadecimal);
    document
        .trailer
        .set("ID", vec![identifier.clone(), identifier]);
    let mut file = Vec::new();
    document.save_to(&mut file).map_err(failed)?;
    Ok(file)
}

fn round(value: f32) -> f32 {
    (value * 100.0).round() / 100.0
}
