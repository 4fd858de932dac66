/**
 * Words of the privacy line and of what it opens.
 */

export const privacy = {
  line: 'Your table stays in this browser',
  check: 'how to check',
  title: 'Where your table goes: nowhere',
  close: 'Close',
  sections: [
    {
      title: 'What this page does',
      points: [
        'It computes on this machine, in this tab. No address to send anything to is in its code.',
        'It writes nothing to cookies, to the address line or to the console, and nothing to browser storage unless you ask it in Data to keep your work on this device.',
        'Close the tab and the table is gone, unless you asked to keep it.',
      ],
    },
    {
      title: 'What the browser blocks',
      points: [
        'The page carries a rule (a content security policy) that forbids scripts, pictures, fonts, frames and forms from elsewhere.',
        'Once its own parts are loaded, and before your table is read, the page adds a second rule: no connection at all, not even to the place it came from.',
        'Both rules also bind the worker that does the computing. A page cannot take such a rule back.',
      ],
    },
    {
      title: 'What the browser cannot block',
      points: [
        'A rule of this kind does not stop a page from opening another address, and some browsers let short peer-to-peer messages pass. This page does neither.',
        'Browser extensions, and whoever manages this machine, can read any page. That holds for every program here.',
      ],
    },
    {
      title: 'How to watch',
      points: [
        'Open the developer tools (F12), choose the network list, then paste a table: no line is added.',
        'Or load the page, disconnect from the network, and work: everything still works.',
      ],
    },
  ],
};
