import { mount } from 'svelte'
import App from './App.svelte'
import { cssText, darkTheme, lightTheme } from './view/theme.ts'
import './style.css'

// The painters' themes are the only place where colours are written; the style sheet takes them from here.
const tokens = document.createElement('style')
tokens.textContent = `:root { ${cssText(lightTheme)} }
:root[data-theme='dark'] { ${cssText(darkTheme)} }`
document.head.append(tokens)

const target = document.getElementById('page')
if (!target) throw new Error('index.html has no element with the id page')
mount(App, { target })
