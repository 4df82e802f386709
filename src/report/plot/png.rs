//! PNG from the same SVG, with the font that comes with the program, so that both formats show the
//! same picture on every machine.

use crate::error::{Error, Result};
use resvg::{tiny_skia, usvg};

const FONT: &[u8] = include_bytes!("../../../assets/DejaVuSans.ttf");

/// The picture at twice the size of the SVG.
///
/// # Errors
/// The SVG cannot be read or the picture cannot be encoded.
pub fn png(svg: &str) -> Result<Vec<u8>> {
    let failed =
        |what: String| Error::check(format!("the picture cannot be turned into PNG: {what}; write SVG instead"));
    let mut options = usvg::Options { font_family: "DejaVu Sans".to_string(), ..usvg::Options::default() };
    options.fontdb_mut().load_font_data(FONT.to_vec());
    options.fontdb_mut().set_sans_serif_family("DejaVu Sans");
    let tree = usvg::Tree::from_str(svg, &options).map_err(|cause| failed(cause.to_string()))?;
    let (width, height) = (tree.size().width() * 2.0, tree.size().height() * 2.0);
    let mut picture =
        tiny_skia::Pixmap::new(width as u32, height as u32).ok_or_else(|| failed("no size".to_string()))?;
    resvg::render(&tree, tiny_skia::Transform::from_scale(2.0, 2.0), &mut picture.as_mut());
    picture.encode_png().map_err(|cause| failed(cause.to_string()))
}
