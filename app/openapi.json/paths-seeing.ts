import * as cut from '@/app/api/v1/overlays/[slug]/cut/route'
import * as events from '@/app/api/v1/overlays/[slug]/events/route'
import * as exported from '@/app/api/v1/overlays/[slug]/export/[file]/route'
import * as linkStory from '@/app/api/v1/overlays/[slug]/links/[a]/[b]/route'
import * as links from '@/app/api/v1/overlays/[slug]/links/route'
import * as moments from '@/app/api/v1/overlays/[slug]/moments/route'
import * as node from '@/app/api/v1/overlays/[slug]/nodes/[name]/route'
import * as nodes from '@/app/api/v1/overlays/[slug]/nodes/route'
import * as reading from '@/app/api/v1/overlays/[slug]/reading/route'
import * as readings from '@/app/api/v1/overlays/[slug]/readings/route'
import * as overlay from '@/app/api/v1/overlays/[slug]/route'
import * as weakPlace from '@/app/api/v1/overlays/[slug]/weak/route'
import * as overlays from '@/app/api/v1/overlays/route'
import type { PathRow } from '@/lib/openapi'

/** What an overlay is and how it holds together. */
export const SEEING: readonly PathRow[] = [
  {
    path: '/overlays',
    methods: [
      { method: 'GET', handler: overlays.GET, does: 'Lists the overlays of your teams', answers: 'Overlays' },
      { method: 'POST', handler: overlays.POST, does: 'Makes an overlay', answers: 'Overlay' },
    ],
  },
  {
    path: '/overlays/{slug}',
    methods: [
      { method: 'GET', handler: overlay.GET, does: 'Reads an overlay', answers: 'Overlay' },
      {
        method: 'PATCH',
        handler: overlay.PATCH,
        does: 'Changes when agents retire by themselves',
        answers: 'Overlay',
      },
    ],
  },
  {
    path: '/overlays/{slug}/reading',
    methods: [
      {
        method: 'GET',
        handler: reading.GET,
        does: 'Reads the latest reading, or that of a past moment',
        answers: 'Reading',
      },
    ],
  },
  {
    path: '/overlays/{slug}/readings',
    methods: [
      {
        method: 'GET',
        handler: readings.GET,
        does: 'Lists readings in steps over a time',
        answers: 'Readings',
      },
    ],
  },
  {
    path: '/overlays/{slug}/cut',
    methods: [
      {
        method: 'GET',
        handler: cut.GET,
        does: 'Reads the weak cut: sides and crossing links',
        answers: 'Cut',
      },
    ],
  },
  {
    path: '/overlays/{slug}/nodes',
    methods: [{ method: 'GET', handler: nodes.GET, does: 'Lists nodes by name', answers: 'Nodes' }],
  },
  {
    path: '/overlays/{slug}/nodes/{name}',
    methods: [
      { method: 'GET', handler: node.GET, does: 'Reads a node and its story', answers: 'NodeStory' },
      {
        method: 'DELETE',
        handler: node.DELETE,
        does: 'Retires a node: it is not counted any more and its name is free',
        answers: 'Node',
      },
    ],
  },
  {
    path: '/overlays/{slug}/links',
    methods: [
      { method: 'GET', handler: links.GET, does: 'Lists links as disclosure allows', answers: 'Links' },
    ],
  },
  {
    path: '/overlays/{slug}/links/{a}/{b}',
    methods: [
      { method: 'GET', handler: linkStory.GET, does: 'Reads a link and its story', answers: 'LinkStory' },
    ],
  },
  {
    path: '/overlays/{slug}/weak',
    methods: [
      {
        method: 'GET',
        handler: weakPlace.GET,
        does: 'Reads where the overlay is weakest, what that follows and what each crossing link carries',
        answers: 'WeakPlace',
      },
    ],
  },
  {
    path: '/overlays/{slug}/moments',
    methods: [
      {
        method: 'GET',
        handler: moments.GET,
        does: 'Lists the moments of which a snapshot is kept',
        answers: 'Moments',
      },
    ],
  },
  {
    path: '/overlays/{slug}/events',
    methods: [
      {
        method: 'GET',
        handler: events.GET,
        does: 'Lists the events of the last hour, or follows them',
        answers: 'Events',
        streams: true,
      },
    ],
  },
  {
    path: '/overlays/{slug}/export/{file}',
    methods: [
      { method: 'GET', handler: exported.GET, does: 'Hands out what one may see as a file', answers: null },
    ],
  },
]
