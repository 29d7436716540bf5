"""What a sweep says: counted frames in, small records and sentences out.

Nothing here decides whether a specification survives; that is done once, in the store's
queries.  These modules read counted frames and put them into words.
"""
