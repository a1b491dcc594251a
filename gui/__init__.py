"""The desktop window (tkinter only); started by `digitise window` or `python -m gui`.

Without tkinter, and tested without a screen:

    state      one step of the history, frozen: picture, charts, what was told, readings
    session    all that the window holds: the state, undo and redo, edits, what is held
    flow       open, read, settle a grid, save; jobs: the same as the worker is asked for it; worker: its thread
    hand       what the pointer and the arrow keys do, tool by tool
    overlay    what lies over the picture, as shapes; places: where a reason to look has its place; at_place: ink
    frame      the part of the picture that is shown, and its pixels; colours: of the overlay
    specs      the fields as data; words, found_words, level_text, table_text, file_names: texts in and out
    keys       every command with its words and its key; samples: the pictures that come with us

Widgets, kept thin:

    start      begin; window: all of it, kept in step; panes: how it is laid out; actions: what every command does
    chart_view the picture; sight: loupe and keyboard's sight; pen: draws shapes; level_editor: types a ring's level
    redraw_view, lists (with review_list), fields (with field, told_list), place_menu, welcome, pages, dialogs
    theme      colours, fonts, styles; clipboard, drop: pictures from elsewhere; sweeper: garbage, in our own thread
"""
