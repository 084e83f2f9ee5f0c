"""gunicorn behind a proxy: `gunicorn deploy.wsgi:application --config deploy/services/gunicorn.conf.py`."""

import os

# PORT only where several instances share a machine.
bind = f"127.0.0.1:{os.environ.get('PORT', '8000')}"
worker_class = "gthread"
workers = int(os.environ.get("WEB_CONCURRENCY", "2"))
threads = 8
timeout = 60
graceful_timeout = 30
# The heartbeat file in memory: on a slow disk a worker would be taken for dead.
worker_tmp_dir = "/dev/shm"  # noqa: S108
# A worker is replaced now and then, not all at the same moment.
max_requests = 5000
max_requests_jitter = 500
control_socket_disable = True
# The proxy keeps the access log.
accesslog = None
