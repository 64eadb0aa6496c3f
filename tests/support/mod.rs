//! What several test files share: where the open circuits lie.

use std::path::{Path, PathBuf};

/// The folder of open circuits, when it is there: `CARRYWISE_DATASETS`, else
/// `shared/datasets` beside the repository. Tests that need it say so and pass
/// where it is absent.
#[allow(dead_code)]
pub fn datasets() -> Option<PathBuf> {
    let path = std::env::var_os("CARRYWISE_DATASETS").map_or_else(
        || Path::new(env!("CARGO_MANIFEST_DIR")).join("../shared/datasets"),
        PathBuf::from,
    );
    if path.is_dir() {
        return Some(path);
    }
    eprintln!("skipped: the open circuits are not at {}", path.display());
    None
}
