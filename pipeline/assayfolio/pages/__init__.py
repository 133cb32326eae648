"""The register of runs as pages for a browser: values in, the contents of files out."""
