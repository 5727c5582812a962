import './app/strictPolicy.ts';
import './app/theme.css';
import { createRoot } from 'react-dom/client';
import { App } from './app/App.tsx';
import { applyStoredTheme } from './lib/theme.ts';

applyStoredTheme();

// A page that comes back from the browser's back-forward cache may belong to a session that has ended, or show
// what was meant to be gone: start it afresh (R29).
window.addEventListener('pageshow', (event) => {
  if (event.persisted) window.location.reload();
});

const root = document.getElementById('root');
if (!root) throw new Error('index.html has no element with the id "root"');
createRoot(root).render(<App />);
