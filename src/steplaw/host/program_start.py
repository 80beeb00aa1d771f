"""What the process of a tallied program is started with."""

#: Notes what is imported before steplaw is, for `steplaw.host.program` to restore.
START = (
    "import sys; b = (set(sys.modules), {k: getattr(f, '_path_mtime', None) "
    "for k, f in sys.path_importer_cache.items()}); "
    "from steplaw.host.program import main; main(b)"
)
