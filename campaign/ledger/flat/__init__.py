"""The flat measurement table: read, checked and written, without a database.

sources and workbooks give the rows of a file, heading says which column is which (headers,
units, mapping), decimals finds the decimal mark, columns and values turn cells into typed
values, rows puts them together, reading is what others call. writing and template write.
"""
