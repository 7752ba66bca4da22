"""The books of a step: what crosses its boundary, its balance, its verdict; paths and audits."""
