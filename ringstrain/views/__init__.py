"""What the reader sees: sentences, tables, TSV and JSON made from finished records.  Nothing is calculated here."""
