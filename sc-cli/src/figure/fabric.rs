//! What a caption says of a layered fabric.

use super::number::tidy;
use sc_core::outline::Fabric;

/// A layered fabric, and in which coordinates it is drawn.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FabricView {
    /// The fabric.
    pub fabric: Fabric,
    /// Factors of lengths along and across the layers in the stretched section.
    pub factors: (f64, f64),
    /// Whether the stretched section is drawn.
    pub stretched: bool,
}

impl FabricView {
    /// A line for the figure of a section.
    pub(super) fn section_words(self) -> String {
        if self.stretched { self.stretched_words() } else { format!("{}.", self.layers()) }
    }

    /// A line for the figure of a flow net.
    pub(super) fn net_words(self) -> String {
        if self.stretched {
            return self.stretched_words();
        }
        format!(
            "{}: in true coordinates the lines do not cross at right angles; cells are squares in the stretched section",
            self.layers()
        )
    }

    fn stretched_words(self) -> String {
        format!(
            "{}. Stretched section: lengths along the layers times {}, across them times {}; there it conducts alike \
             in all directions",
            self.layers(),
            tidy(self.factors.0, 4),
            tidy(self.factors.1, 4)
        )
    }

    fn layers(self) -> String {
        let Fabric { along, across, dip } = self.fabric;
        format!(
            "Layers dipping {} degrees from the x axis, {} times as conductive along as across",
            tidy(dip, 6),
            tidy(along / across, 4)
        )
    }
}
