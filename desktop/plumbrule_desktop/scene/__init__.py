"""Pictures of molecules: data first, then one file that knows VTK and one that needs only Qt."""
