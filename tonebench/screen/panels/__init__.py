"""The panels beside and under the charts: plain data in, text out; none of them takes the focus."""
