use super::*;

fn fault(bytes: &[u8]) -> PictureFault {
    read(bytes).expect_err("a fault")
}

#[test]
fn hand_svg_becomes_a_scene_in_points() {
    let svg = br##"<svg xmlns="http://www.w3.org/2000/svg" width="96" height="48"><rect x="0" y="0" width="96" height="48" fill="#ff0000" fill-opacity="0.5"/></svg>"##;
    let Ok(Artwork::Vector(scene)) = read(svg) else {
        panic!("a scene")
    };
    assert_eq!((scene.width, scene.height), (72.0, 36.0));
    let Item::Path {
        fill: Some(fill), ..
    } = &scene.items[0]
    else {
        panic!("a filled path: {:?}", scene.items)
    };
    assert_eq!(fill.colour, Rgb(255, 128, 128));
}

#[test]
fn hand_words_in_svg_become_outlines_whatever_their_font() {
    let svg = br#"<svg xmlns="http://www.w3.org/2000/svg" width="96" height="48"><text x="4" y="20" font-family="Nowhere Grotesk">Tank</text></svg>"#;
    let Ok(Artwork::Vector(scene)) = read(svg) else {
        panic!("a scene")
    };
    assert!(!scene.items.is_empty());
}

#[test]
fn hand_pictures_that_lie_or_reach_out_are_refused() {
    let link = br#"<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink" width="9" height="9"><image xlink:href="/etc/passwd" width="9" height="9"/></svg>"#;
    assert_eq!(fault(link), PictureFault::ExternalReference);
    assert_eq!(fault(b"<svg"), PictureFault::Damaged("SVG text"));
    assert_eq!(fault(b"GIF89a"), PictureFault::UnknownKind);
    assert_eq!(
        fault(b"\x89PNG\r\n\x1a\nnonsense"),
        PictureFault::Damaged("PNG header")
    );
    assert_eq!(
        fault(&[0xff, 0xd8, 0xff, 0xe0, 0, 4, 0, 0]),
        PictureFault::Damaged("JPEG header")
    );
    let gradient = br#"<svg xmlns="http://www.w3.org/2000/svg" width="9" height="9"><linearGradient id="g"><stop offset="0"/><stop offset="1" stop-color="red"/></linearGradient><rect width="9" height="9" fill="url(#g)"/></svg>"#;
    assert_eq!(
        fault(gradient),
        PictureFault::Unsupported("colour gradients")
    );
}

#[test]
fn hand_png_transparency_is_laid_on_white() {
    let mut file = Vec::new();
    let mut encoder = png::Encoder::new(&mut file, 2, 1);
    encoder.set_color(png::ColorType::Rgba);
    encoder.set_depth(png::BitDepth::Eight);
    let mut writer = encoder.write_header().expect("header");
    writer
        .write_image_data(&[255, 0, 0, 255, 0, 0, 0, 0])
        .expect("pixels");
    writer.finish().expect("end");
    let Ok(Artwork::Raster(raster)) = read(&file) else {
        panic!("pixels")
    };
    assert_eq!(raster.data, RasterData::Rgb(vec![255, 0, 0, 255, 255, 255]));
}

#[test]
fn hand_jpeg_is_measured_and_passed_on() {
    // Marker SOI, a comment, a frame header of 3 components with 300 by 200 pixels, EOI.
    let mut file = vec![
        0xff, 0xd8, 0xff, 0xfe, 0, 4, b'h', b'i', 0xff, 0xc0, 0, 17, 8, 0, 200, 1, 44, 3,
    ];
    file.extend([1, 0x11, 0, 2, 0x11, 1, 3, 0x11, 1, 0xff, 0xd9]);
    let Ok(Artwork::Raster(raster)) = read(&file) else {
        panic!("pixels")
    };
    assert_eq!((raster.width, raster.height), (300, 200));
    assert_eq!(
        raster.data,
        RasterData::Jpeg {
            components: 3,
            file: file.clone()
        }
    );
    file[17] = 4;
    assert_eq!(
        fault(&file),
        PictureFault::Unsupported("JPEG colours other than grey and RGB")
    );
    file[17] = 3;
    file[14] = 0;
    file[13] = 0;
    assert_eq!(fault(&file), PictureFault::Size);
    file.truncate(20);
    assert!(read(&file).is_err());
}

#[test]
fn prop_no_cut_or_changed_picture_panics() {
    let mut png_file = Vec::new();
    let mut encoder = png::Encoder::new(&mut png_file, 3, 3);
    encoder.set_color(png::ColorType::Rgb);
    let mut writer = encoder.write_header().expect("header");
    writer.write_image_data(&[7; 27]).expect("pixels");
    writer.finish().expect("end");
    let svg = crate::render::sample::SKETCH.as_bytes().to_vec();
    for file in [png_file, svg] {
        for i in 0..file.len().min(400) {
            let mut changed = file.clone();
            changed[i] ^= 0x55;
            let _ = read(&changed);
            let _ = read(&file[..i]);
        }
    }
}
