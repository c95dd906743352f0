"""From a result to a document: a list of blocks that says it in words. One short file a job."""
