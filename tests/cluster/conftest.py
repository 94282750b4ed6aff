"""These tests need the extra "cluster": without it they are not collected.

pip install '.[test,cluster]' && pytest tests/cluster
"""

from importlib.util import find_spec

collect_ignore = [] if find_spec("distributed") else ["test_vary_cluster.py"]
