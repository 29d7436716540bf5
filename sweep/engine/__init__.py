"""From a plan to stored rows: tasks, waves of workers, one writer."""
