"""Static files under names that carry their content's hash, the imports of script modules too.

A page and the worker that keeps it for the time without a network must never mix modules of two versions.
"""

from whitenoise.storage import CompressedManifestStaticFilesStorage


class HashedFiles(CompressedManifestStaticFilesStorage):
    """Whitenoise's storage, which also rewrites what one module imports from another."""

    support_js_module_import_aggregation = True
