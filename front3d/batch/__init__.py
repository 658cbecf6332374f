"""A study of many cases: on this machine's processes, or on a cluster, into one table.

`study` says which cases there are, `identity` what makes two runs of a case the same, `finished`
how a case's folder is written and found again, `worker` what is done with one case, `running` who
does it, and `gathering` makes the tables.
"""
