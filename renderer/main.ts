import { mount } from 'svelte';
import { connect } from '../main/page/page-bridge';
import './theme/tokens.css';
import './theme/base.css';
import Unreachable from './Unreachable.svelte';
import Window from './Window.svelte';

const target = document.getElementById('window')!;
const bridge = await connect();
const start = await bridge.call('start', {});
if (start.ok) mount(Window, { target, props: { bridge, facts: start.value } });
else mount(Unreachable, { target, props: { refusal: start } });
